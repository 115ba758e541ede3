package ode

import "math"

//go:generate sh -c "go run ./unroll >stages.go"

// Coefficients of Rodas5P, G. Steinebach, "Construction of Rosenbrock–Wanner
// method Rodas5P and numerical benchmarks within the Julia Differential
// Equations package", BIT Numerical Mathematics 63 (2023) 27, in the form
// without matrix products of Hairer & Wanner, Solving ODEs II (1996), IV.7:
//
//	(I/(hγ) − J) U_i = f(t + c_i h, y + Σ a_ij U_j) + Σ C_ij U_j / h + h d_i ∂f/∂t
//	y(t+h) ≈ y + Σ a_8j U_j + U_8,  error estimate U_8
//	y(t+θh) ≈ (1−θ) y0 + θ (y1 + (1−θ)(K1 + θ (K2 + θ K3))),  K_r = Σ H_rj U_j
const rodasGamma = 0.21193756319429014

var rodasC = [8]float64{0, 0.6358126895828704, 0.4095798393397535, 0.9769306725060716, 0.4288403609558664, 1, 1, 1}

var rodasD = [8]float64{0.21193756319429014, -0.42387512638858027, -0.3384627126235924, 1.8046452872882734, 2.325825639765069, 0, 0, 0}

// rodasA holds a_ij; row i has i entries. Rows 7 and 8 repeat row 6 with ones
// appended.
var rodasA = [8][8]float64{
	{},
	{3.0},
	{2.849394379747939, 0.45842242204463923},
	{-6.954028509809101, 2.489845061869568, -10.358996098473584},
	{2.8029986275628964, 0.5072464736228206, -0.3988312541770524, -0.04721187230404641},
	{-7.502846399306121, 2.561846144803919, -11.627539656261098, -0.18268767659942256, 0.030198172008377946},
	{-7.502846399306121, 2.561846144803919, -11.627539656261098, -0.18268767659942256, 0.030198172008377946, 1},
	{-7.502846399306121, 2.561846144803919, -11.627539656261098, -0.18268767659942256, 0.030198172008377946, 1, 1},
}

var rodasCC = [8][8]float64{
	{},
	{-14.155112264123755},
	{-17.97296035885952, -2.859693295451294},
	{147.12150275711716, -1.41221402718213, 71.68940251302358},
	{165.43517024871676, -0.4592823456491126, 42.90938336958603, -5.961986721573306},
	{24.854864614690072, -3.0009227002832186, 47.4931110020768, 5.5814197821558125, -0.6610691825249471},
	{30.91273214028599, -3.1208243349937974, 77.79954646070892, 34.28646028294783, -19.097331116725623, -28.087943162872662},
	{37.80277123390563, -3.2571969029072276, 112.26918849496327, 66.9347231244047, -40.06618937091002, -54.66780262877968, -9.48861652309627},
}

var rodasH = [3][8]float64{
	{25.948786856663858, -2.5579724845846235, 10.433815404888879, -2.3679251022685204, 0.524948541321073, 1.1241088310450404, 0.4272876194431874, -0.17202221070155493},
	{-9.91568850695171, -0.9689944594115154, 3.0438037242978453, -24.495224566215796, 20.176138334709044, 15.98066361424651, -6.789040303419874, -6.710236069923372},
	{11.419903575922262, 2.8879645146136994, 72.92137995996029, 80.12511834622643, -52.072871366152654, -59.78993625266729, -0.15582684282751913, 4.883087185713722},
}

// rodasStep attempts one step of length h ending at tEnd. It fills s.y1 and
// s.errv and the stages s.u[i*8+j] = (U_j)_i.
func (s *Solver) rodasStep(h, tEnd float64) outcome {
	n := s.n
	if o := s.factorShifted(1 / (h * rodasGamma)); o != outcomeOK {
		return o
	}
	s.stats.FuncEvals += 7
	s.denseReady = false
	if n >= 2 && n <= 4 && s.band == nil {
		if s.clip {
			tEnd = s.tClip
		}
		s.stats.Solves += 8
		switch n {
		case 2:
			s.rodasStages2(h, tEnd)
		case 3:
			s.rodasStages3(h, tEnd)
		case 4:
			s.rodasStages4(h, tEnd)
		}
		return outcomeOK
	}
	hinv := 1 / h
	u, arg, rhs, sol, fs := s.u, s.arg[:n], s.rhs[:n], s.sol[:n], s.fs[:n]
	ft := s.dfdt[:n]
	for i := range 8 {
		hd := 0.0
		if !s.autonomous {
			hd = h * rodasD[i]
		}
		if i == 0 {
			for k, v := range s.f0[:n] {
				rhs[k] = v + hd*ft[k]
			}
		} else {
			stageSums(i, u, s.y, arg, rhs, hinv)
			ti := tEnd
			if i < 5 {
				ti = s.t + rodasC[i]*h
			} else if s.clip {
				ti = s.tClip
			}
			s.f(fs, ti, arg)
			for k, v := range fs {
				rhs[k] += v + hd*ft[k]
			}
		}
		s.solve(sol, rhs)
		for k, v := range sol {
			u[k*8+i] = v
		}
	}
	for k, e := range sol {
		s.errv[k] = e
		s.y1[k] = arg[k] + e
	}
	return outcomeOK
}

// rodasDense forms the dense-output vectors of the last accepted or attempted
// step.
func (s *Solver) rodasDense() {
	denseSums(s.u, s.dense, s.n)
	s.denseReady = true
}

func (s *Solver) rodasInterp(dst []float64, y0, y1 []float64, th float64) {
	if !s.denseReady {
		s.rodasDense()
	}
	n := len(dst)
	y0, y1, dense := y0[:n], y1[:n], s.dense[:3*n]
	om := 1 - th
	for k := range dst {
		d := (*[3]float64)(dense[k*3:])
		dst[k] = om*y0[k] + th*(y1[k]+om*(d[0]+th*(d[1]+th*d[2])))
	}
}

// rodasInterpDiff is the derivative of rodasInterp with respect to θ.
func (s *Solver) rodasInterpDiff(dst []float64, y0, y1 []float64, th float64) {
	if !s.denseReady {
		s.rodasDense()
	}
	for k := range dst {
		d := (*[3]float64)(s.dense[k*3:])
		// θ(1−θ)(K1 + θK2 + θ²K3)
		dst[k] = y1[k] - y0[k] + (1-2*th)*d[0] + th*((2-3*th)*d[1]+th*(3-4*th)*d[2])
	}
}

// rodasR returns ln|R(z)|, R the stability function of Rodas5P.
func rodasLogR(z complex128) float64 {
	// Applied to y' = λy with h = 1: (1/γ − z) U_i = z (1 + Σ a U) + Σ C U.
	var u [8]complex128
	q := 1/complex(rodasGamma, 0) - z
	if abs1(q) < 1e-12 {
		return math.Inf(1)
	}
	q = cinv(q)
	var y complex128
	for i := range 8 {
		y = 1
		var c complex128
		for j := range i {
			y += complex(rodasA[i][j], 0) * u[j]
			c += complex(rodasCC[i][j], 0) * u[j]
		}
		u[i] = q * (z*y + c)
	}
	y += u[7]
	return 0.5 * math.Log(real(y)*real(y)+imag(y)*imag(y))
}
