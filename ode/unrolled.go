package ode

import "math"

// Sums of Rodas5P and triangular solves written out. The numbers repeat the
// tables of rodas.go, and a test compares the two.

// stageSums forms the argument of f in stage i (from 1) and Σ C_ij U_j / h.
func stageSums(i int, u, y, arg, rhs []float64, hinv float64) {
	arg, rhs = arg[:len(y)], rhs[:len(y)]
	switch i {
	case 1:
		for k := range y {
			v := (*[8]float64)(u[k*8 : k*8+8])
			arg[k] = y[k] + (3.0 * v[0])
			rhs[k] = (-14.155112264123755 * v[0]) * hinv
		}
	case 2:
		for k := range y {
			v := (*[8]float64)(u[k*8 : k*8+8])
			arg[k] = y[k] + (2.849394379747939*v[0] + 0.45842242204463923*v[1])
			rhs[k] = (-17.97296035885952*v[0] - 2.859693295451294*v[1]) * hinv
		}
	case 3:
		for k := range y {
			v := (*[8]float64)(u[k*8 : k*8+8])
			arg[k] = y[k] + (-6.954028509809101*v[0] + 2.489845061869568*v[1] - 10.358996098473584*v[2])
			rhs[k] = (147.12150275711716*v[0] - 1.41221402718213*v[1] + 71.68940251302358*v[2]) * hinv
		}
	case 4:
		for k := range y {
			v := (*[8]float64)(u[k*8 : k*8+8])
			arg[k] = y[k] + (2.8029986275628964*v[0] + 0.5072464736228206*v[1] - 0.3988312541770524*v[2] - 0.04721187230404641*v[3])
			rhs[k] = ((165.43517024871676*v[0] - 0.4592823456491126*v[1]) + (42.90938336958603*v[2] - 5.961986721573306*v[3])) * hinv
		}
	case 5:
		for k := range y {
			v := (*[8]float64)(u[k*8 : k*8+8])
			arg[k] = y[k] + (-7.502846399306121*v[0] + 2.561846144803919*v[1] - 11.627539656261098*v[2] - 0.18268767659942256*v[3] + 0.030198172008377946*v[4])
			rhs[k] = ((24.854864614690072*v[0] - 3.0009227002832186*v[1]) + (47.4931110020768*v[2] + 5.5814197821558125*v[3] - 0.6610691825249471*v[4])) * hinv
		}
	case 6:
		for k := range y {
			v := (*[8]float64)(u[k*8 : k*8+8])
			arg[k] += v[5]
			rhs[k] = ((30.91273214028599*v[0] - 3.1208243349937974*v[1] + 77.79954646070892*v[2]) + (34.28646028294783*v[3] - 19.097331116725623*v[4] - 28.087943162872662*v[5])) * hinv
		}
	case 7:
		for k := range y {
			v := (*[8]float64)(u[k*8 : k*8+8])
			arg[k] += v[6]
			rhs[k] = ((37.80277123390563*v[0] - 3.2571969029072276*v[1] + 112.26918849496327*v[2]) + (66.9347231244047*v[3] - 40.06618937091002*v[4] - 54.66780262877968*v[5] - 9.48861652309627*v[6])) * hinv
		}
	}
}

// denseSums forms K1, K2, K3.
func denseSums(u, dense []float64, n int) {
	for k := range n {
		v := (*[8]float64)(u[k*8 : k*8+8])
		d := (*[3]float64)(dense[k*3 : k*3+3])
		d[0] = (25.948786856663858*v[0] - 2.5579724845846235*v[1] + 10.433815404888879*v[2] - 2.3679251022685204*v[3]) + (0.524948541321073*v[4] + 1.1241088310450404*v[5] + 0.4272876194431874*v[6] - 0.17202221070155493*v[7])
		d[1] = (-9.91568850695171*v[0] - 0.9689944594115154*v[1] + 3.0438037242978453*v[2] - 24.495224566215796*v[3]) + (20.176138334709044*v[4] + 15.98066361424651*v[5] - 6.789040303419874*v[6] - 6.710236069923372*v[7])
		d[2] = (11.419903575922262*v[0] + 2.8879645146136994*v[1] + 72.92137995996029*v[2] + 80.12511834622643*v[3]) + (-52.072871366152654*v[4] - 59.78993625266729*v[5] - 0.15582684282751913*v[6] + 4.883087185713722*v[7])
	}
}

// For n up to 4 the factors are kept so that a solution waits for as few
// operations in a row as possible: L inverted, D inverted, and U divided by D,
// x = U⁻¹ D L⁻¹ b. U itself is not inverted, since its rows may differ by many
// orders of magnitude.

// solve2 solves with the factors of factor2.
func solve2(a *[4]float64, piv *[2]int, x, b *[2]float64) {
	b0, b1 := b[piv[0]], b[piv[1]]
	x1 := (b1 + a[2]*b0) * a[3]
	x0 := b0*a[0] - a[1]*x1
	x[0], x[1] = x0, x1
}

// solve3 solves with the factors of factor3.
func solve3(a *[9]float64, piv *[3]int, x, b *[3]float64) {
	b0, b1, b2 := b[piv[0]], b[piv[1]], b[piv[2]]
	y1 := b1 + a[3]*b0
	x2 := (b2 + (a[6]*b0 + a[7]*b1)) * a[8]
	x1 := y1*a[4] - a[5]*x2
	x0 := (b0*a[0] - a[2]*x2) - a[1]*x1
	x[0], x[1], x[2] = x0, x1, x2
}

// solve4 solves with the factors of factor4.
func solve4(a *[16]float64, piv *[4]int, x, b *[4]float64) {
	b0, b1, b2, b3 := b[piv[0]], b[piv[1]], b[piv[2]], b[piv[3]]
	y1 := b1 + a[4]*b0
	y2 := b2 + (a[8]*b0 + a[9]*b1)
	x3 := ((b3 + a[12]*b0) + (a[13]*b1 + a[14]*b2)) * a[15]
	x2 := y2*a[10] - a[11]*x3
	x1 := (y1*a[5] - a[7]*x3) - a[6]*x2
	x0 := ((b0*a[0] - a[3]*x3) - a[2]*x2) - a[1]*x1
	x[0], x[1], x[2], x[3] = x0, x1, x2, x3
}

// solve5 is luSolve for n = 5.
func solve5(a *[25]float64, piv *[5]int, x, b *[5]float64) {
	x0 := b[piv[0]]
	x1 := b[piv[1]] - a[5]*x0
	x2 := b[piv[2]] - a[10]*x0 - a[11]*x1
	x3 := b[piv[3]] - a[15]*x0 - a[16]*x1 - a[17]*x2
	x4 := b[piv[4]] - a[20]*x0 - a[21]*x1 - a[22]*x2 - a[23]*x3
	x4 *= a[24]
	x3 = (x3 - a[19]*x4) * a[18]
	x2 = (x2 - a[14]*x4 - a[13]*x3) * a[12]
	x1 = (x1 - a[9]*x4 - a[8]*x3 - a[7]*x2) * a[6]
	x0 = (x0 - a[4]*x4 - a[3]*x3 - a[2]*x2 - a[1]*x1) * a[0]
	x[0], x[1], x[2], x[3], x[4] = x0, x1, x2, x3, x4
}

// solve6 is luSolve for n = 6.
func solve6(a *[36]float64, piv *[6]int, x, b *[6]float64) {
	x0 := b[piv[0]]
	x1 := b[piv[1]] - a[6]*x0
	x2 := b[piv[2]] - a[12]*x0 - a[13]*x1
	x3 := b[piv[3]] - a[18]*x0 - a[19]*x1 - a[20]*x2
	x4 := b[piv[4]] - a[24]*x0 - a[25]*x1 - a[26]*x2 - a[27]*x3
	x5 := b[piv[5]] - a[30]*x0 - a[31]*x1 - a[32]*x2 - a[33]*x3 - a[34]*x4
	x5 *= a[35]
	x4 = (x4 - a[29]*x5) * a[28]
	x3 = (x3 - a[23]*x5 - a[22]*x4) * a[21]
	x2 = (x2 - a[17]*x5 - a[16]*x4 - a[15]*x3) * a[14]
	x1 = (x1 - a[11]*x5 - a[10]*x4 - a[9]*x3 - a[8]*x2) * a[7]
	x0 = (x0 - a[5]*x5 - a[4]*x4 - a[3]*x3 - a[2]*x2 - a[1]*x1) * a[0]
	x[0], x[1], x[2], x[3], x[4], x[5] = x0, x1, x2, x3, x4, x5
}

// solve7 is luSolve for n = 7.
func solve7(a *[49]float64, piv *[7]int, x, b *[7]float64) {
	x0 := b[piv[0]]
	x1 := b[piv[1]] - a[7]*x0
	x2 := b[piv[2]] - a[14]*x0 - a[15]*x1
	x3 := b[piv[3]] - a[21]*x0 - a[22]*x1 - a[23]*x2
	x4 := b[piv[4]] - a[28]*x0 - a[29]*x1 - a[30]*x2 - a[31]*x3
	x5 := b[piv[5]] - a[35]*x0 - a[36]*x1 - a[37]*x2 - a[38]*x3 - a[39]*x4
	x6 := b[piv[6]] - a[42]*x0 - a[43]*x1 - a[44]*x2 - a[45]*x3 - a[46]*x4 - a[47]*x5
	x6 *= a[48]
	x5 = (x5 - a[41]*x6) * a[40]
	x4 = (x4 - a[34]*x6 - a[33]*x5) * a[32]
	x3 = (x3 - a[27]*x6 - a[26]*x5 - a[25]*x4) * a[24]
	x2 = (x2 - a[20]*x6 - a[19]*x5 - a[18]*x4 - a[17]*x3) * a[16]
	x1 = (x1 - a[13]*x6 - a[12]*x5 - a[11]*x4 - a[10]*x3 - a[9]*x2) * a[8]
	x0 = (x0 - a[6]*x6 - a[5]*x5 - a[4]*x4 - a[3]*x3 - a[2]*x2 - a[1]*x1) * a[0]
	x[0], x[1], x[2], x[3], x[4], x[5], x[6] = x0, x1, x2, x3, x4, x5, x6
}

// solve8 is luSolve for n = 8.
func solve8(a *[64]float64, piv *[8]int, x, b *[8]float64) {
	x0 := b[piv[0]]
	x1 := b[piv[1]] - a[8]*x0
	x2 := b[piv[2]] - a[16]*x0 - a[17]*x1
	x3 := b[piv[3]] - a[24]*x0 - a[25]*x1 - a[26]*x2
	x4 := b[piv[4]] - a[32]*x0 - a[33]*x1 - a[34]*x2 - a[35]*x3
	x5 := b[piv[5]] - a[40]*x0 - a[41]*x1 - a[42]*x2 - a[43]*x3 - a[44]*x4
	x6 := b[piv[6]] - a[48]*x0 - a[49]*x1 - a[50]*x2 - a[51]*x3 - a[52]*x4 - a[53]*x5
	x7 := b[piv[7]] - a[56]*x0 - a[57]*x1 - a[58]*x2 - a[59]*x3 - a[60]*x4 - a[61]*x5 - a[62]*x6
	x7 *= a[63]
	x6 = (x6 - a[55]*x7) * a[54]
	x5 = (x5 - a[47]*x7 - a[46]*x6) * a[45]
	x4 = (x4 - a[39]*x7 - a[38]*x6 - a[37]*x5) * a[36]
	x3 = (x3 - a[31]*x7 - a[30]*x6 - a[29]*x5 - a[28]*x4) * a[27]
	x2 = (x2 - a[23]*x7 - a[22]*x6 - a[21]*x5 - a[20]*x4 - a[19]*x3) * a[18]
	x1 = (x1 - a[15]*x7 - a[14]*x6 - a[13]*x5 - a[12]*x4 - a[11]*x3 - a[10]*x2) * a[9]
	x0 = (x0 - a[7]*x7 - a[6]*x6 - a[5]*x5 - a[4]*x4 - a[3]*x3 - a[2]*x2 - a[1]*x1) * a[0]
	x[0], x[1], x[2], x[3], x[4], x[5], x[6], x[7] = x0, x1, x2, x3, x4, x5, x6, x7
}

// factor2 is luFactor for n = 2.
func factor2(a *[4]float64, piv *[2]int, rs *[2]float64) bool {
	a00, a01, a10, a11 := a[0], a[1], a[2], a[3]
	p0, p1 := 0, 1
	if math.Abs(a10)*rs[1] > math.Abs(a00)*rs[0] {
		a00, a01, p0, a10, a11, p1 = a10, a11, p1, a00, a01, p0
	}
	d0 := 1 / a00
	a10 *= d0
	d1 := 1 / (a11 - a10*a01)
	a[0], a[1], a[2], a[3] = d0, a01*d0, -a10, d1
	piv[0], piv[1] = p0, p1
	z := 0*d0 + 0*d1
	return z == 0 && d0 != 0 && d1 != 0
}

// factor3 is luFactor for n = 3.
func factor3(a *[9]float64, piv *[3]int, rs *[3]float64) bool {
	a00, a01, a02 := a[0], a[1], a[2]
	a10, a11, a12 := a[3], a[4], a[5]
	a20, a21, a22 := a[6], a[7], a[8]
	r0, r1, r2 := rs[0], rs[1], rs[2]
	p0, p1, p2 := 0, 1, 2
	best := math.Abs(a00) * r0
	at := 0
	if m := math.Abs(a10) * r1; m > best {
		best, at = m, 1
	}
	if m := math.Abs(a20) * r2; m > best {
		best, at = m, 2
	}
	switch at {
	case 1:
		a00, a01, a02, r0, p0, a10, a11, a12, r1, p1 = a10, a11, a12, r1, p1, a00, a01, a02, r0, p0
	case 2:
		a00, a01, a02, r0, p0, a20, a21, a22, r2, p2 = a20, a21, a22, r2, p2, a00, a01, a02, r0, p0
	}
	d0 := 1 / a00
	a10 *= d0
	a11 -= a10 * a01
	a12 -= a10 * a02
	a20 *= d0
	a21 -= a20 * a01
	a22 -= a20 * a02
	best = math.Abs(a11) * r1
	at = 1
	if m := math.Abs(a21) * r2; m > best {
		best, at = m, 2
	}
	switch at {
	case 2:
		a10, a11, a12, r1, p1, a20, a21, a22, r2, p2 = a20, a21, a22, r2, p2, a10, a11, a12, r1, p1
	}
	d1 := 1 / a11
	a21 *= d1
	a22 -= a21 * a12
	d2 := 1 / a22
	a[0], a[1], a[2] = d0, a01*d0, a02*d0
	a[3], a[4], a[5] = -a10, d1, a12*d1
	a[6], a[7], a[8] = a21*a10-a20, -a21, d2
	piv[0], piv[1], piv[2] = p0, p1, p2
	// The inverse of a zero pivot is infinite, of an infinite one zero.
	z := 0*d0 + 0*d1 + 0*d2
	return z == 0 && d0 != 0 && d1 != 0 && d2 != 0
}

// factor4 is luFactor for n = 4.
func factor4(a *[16]float64, piv *[4]int, rs *[4]float64) bool {
	a00, a01, a02, a03 := a[0], a[1], a[2], a[3]
	a10, a11, a12, a13 := a[4], a[5], a[6], a[7]
	a20, a21, a22, a23 := a[8], a[9], a[10], a[11]
	a30, a31, a32, a33 := a[12], a[13], a[14], a[15]
	r0, r1, r2, r3 := rs[0], rs[1], rs[2], rs[3]
	p0, p1, p2, p3 := 0, 1, 2, 3
	best := math.Abs(a00) * r0
	at := 0
	if m := math.Abs(a10) * r1; m > best {
		best, at = m, 1
	}
	if m := math.Abs(a20) * r2; m > best {
		best, at = m, 2
	}
	if m := math.Abs(a30) * r3; m > best {
		best, at = m, 3
	}
	switch at {
	case 1:
		a00, a01, a02, a03, r0, p0, a10, a11, a12, a13, r1, p1 = a10, a11, a12, a13, r1, p1, a00, a01, a02, a03, r0, p0
	case 2:
		a00, a01, a02, a03, r0, p0, a20, a21, a22, a23, r2, p2 = a20, a21, a22, a23, r2, p2, a00, a01, a02, a03, r0, p0
	case 3:
		a00, a01, a02, a03, r0, p0, a30, a31, a32, a33, r3, p3 = a30, a31, a32, a33, r3, p3, a00, a01, a02, a03, r0, p0
	}
	d0 := 1 / a00
	a10 *= d0
	a11 -= a10 * a01
	a12 -= a10 * a02
	a13 -= a10 * a03
	a20 *= d0
	a21 -= a20 * a01
	a22 -= a20 * a02
	a23 -= a20 * a03
	a30 *= d0
	a31 -= a30 * a01
	a32 -= a30 * a02
	a33 -= a30 * a03
	best = math.Abs(a11) * r1
	at = 1
	if m := math.Abs(a21) * r2; m > best {
		best, at = m, 2
	}
	if m := math.Abs(a31) * r3; m > best {
		best, at = m, 3
	}
	switch at {
	case 2:
		a10, a11, a12, a13, r1, p1, a20, a21, a22, a23, r2, p2 = a20, a21, a22, a23, r2, p2, a10, a11, a12, a13, r1, p1
	case 3:
		a10, a11, a12, a13, r1, p1, a30, a31, a32, a33, r3, p3 = a30, a31, a32, a33, r3, p3, a10, a11, a12, a13, r1, p1
	}
	d1 := 1 / a11
	a21 *= d1
	a22 -= a21 * a12
	a23 -= a21 * a13
	a31 *= d1
	a32 -= a31 * a12
	a33 -= a31 * a13
	best = math.Abs(a22) * r2
	at = 2
	if m := math.Abs(a32) * r3; m > best {
		best, at = m, 3
	}
	switch at {
	case 3:
		a20, a21, a22, a23, r2, p2, a30, a31, a32, a33, r3, p3 = a30, a31, a32, a33, r3, p3, a20, a21, a22, a23, r2, p2
	}
	d2 := 1 / a22
	a32 *= d2
	a33 -= a32 * a23
	d3 := 1 / a33
	m20, m31 := a21*a10-a20, a32*a21-a31
	a[0], a[1], a[2], a[3] = d0, a01*d0, a02*d0, a03*d0
	a[4], a[5], a[6], a[7] = -a10, d1, a12*d1, a13*d1
	a[8], a[9], a[10], a[11] = m20, -a21, d2, a23*d2
	a[12], a[13], a[14], a[15] = (a31*a10-a30)-a32*m20, m31, -a32, d3
	piv[0], piv[1], piv[2], piv[3] = p0, p1, p2, p3
	// The inverse of a zero pivot is infinite, of an infinite one zero.
	z := 0*d0 + 0*d1 + 0*d2 + 0*d3
	return z == 0 && d0 != 0 && d1 != 0 && d2 != 0 && d3 != 0
}
