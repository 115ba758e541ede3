// Peer compares package ode with CVODE on the same problems in one run. The
// script run.sh builds both and explains the options; the peer is a plain C
// program that this one starts between its own passes.
//
// For each problem both codes run over a range of tolerances. Times are the
// least of interleaved passes; the error is the largest relative error of any
// component at any output, the median over the members, against a reference
// computed by the order-13 Radau method at a relative tolerance of 1e-13.
// Times at equal error come from interpolating log time in log error.
package main

import (
	"bytes"
	"encoding/binary"
	"flag"
	"fmt"
	"math"
	"os"
	"os/exec"
	"runtime"
	"slices"
	"strings"
	"syscall"
	"unsafe"

	"cycle/ode"
	"cycle/ode/odetest"
)

type problem struct {
	name             string
	n, members, outs int
	t1               float64
	scale            []float64
	band             *ode.Band
	set              func(member int, y []float64)
	f                ode.Func
	jac              ode.JacFunc
	autonomous       bool
	events           []ode.Event
}

func standard(name string, p *odetest.Problem, band *ode.Band) *problem {
	return &problem{
		name: name, n: len(p.Y0), members: 1, outs: 1, t1: p.T1, scale: p.Scale, band: band,
		set: func(_ int, y []float64) { copy(y, p.Y0) }, f: p.Func, jac: p.Jac, autonomous: p.Autonomous,
	}
}

func thermostat() *problem {
	var th odetest.Thermostat
	return &problem{
		name: "thermostat", n: 4, members: 256, outs: 45, t1: odetest.ThermostatT1, scale: odetest.ThermostatScale[:],
		set: func(m int, y []float64) {
			var y0 [4]float64
			th, y0 = odetest.ThermostatMember(m)
			copy(y, y0[:])
		},
		f:   func(d []float64, t float64, y []float64) { th.Func(d, t, y) },
		jac: func(j, dt []float64, t float64, y []float64) { th.Jac(j, dt, t, y) },
		events: []ode.Event{
			{Name: "cold", Func: func(_ float64, y []float64) float64 { return y[0] - 255 }},
			{Name: "scarce", Func: func(_ float64, y []float64) float64 { return y[1] - 1 }},
		},
	}
}

type run struct {
	rtol           float64
	ns             float64
	steps, evals   float64
	failed, events int
	out            []float64
	err            float64
	late           int
	s              *ode.Solver
}

func (p *problem) solver(m ode.Method, rtol float64, analytic, guard bool) *ode.Solver {
	at := make([]float64, p.n)
	for i := range at {
		at[i] = rtol * p.scale[i]
	}
	op := &ode.Problem{Dim: p.n, Func: p.f, Autonomous: p.autonomous, Events: p.events, Band: p.band}
	if analytic {
		op.Jac = p.jac
	}
	s, err := ode.NewSolver(op, &ode.Settings{Method: m, RelTol: rtol, AbsTol: at, MaxSteps: 10000000, Guard: ode.Guard{Off: !guard}})
	if err != nil {
		fmt.Fprintln(os.Stderr, "peer:", err)
		os.Exit(1)
	}
	return s
}

func (p *problem) times() []float64 {
	ts := make([]float64, p.outs)
	for k := range ts {
		ts[k] = p.t1 * float64(k+1) / float64(p.outs)
	}
	return ts
}

// cpu returns the processor time of this thread in ns, which a busy machine
// disturbs less than the time of day.
func cpu() float64 {
	const threadCPU = 3 // CLOCK_THREAD_CPUTIME_ID
	var ts syscall.Timespec
	if _, _, e := syscall.Syscall(syscall.SYS_CLOCK_GETTIME, threadCPU, uintptr(unsafe.Pointer(&ts)), 0); e != 0 {
		fmt.Fprintln(os.Stderr, "peer:", e)
		os.Exit(1)
	}
	return float64(ts.Nano())
}

// pass runs all members once.
func (p *problem) pass(r *run, times []float64) {
	y := make([]float64, p.n)
	w := p.n * p.outs
	r.steps, r.evals, r.failed, r.events = 0, 0, 0, 0
	start := cpu()
	for m := range p.members {
		p.set(m, y)
		res, err := r.s.IntegrateAt(r.out[m*w:(m+1)*w], times, 0, y)
		if err != nil {
			r.failed++
		}
		r.steps += float64(res.Stats.Steps)
		r.evals += float64(res.Stats.FuncEvals)
		r.events += len(res.Events)
	}
	ns := (cpu() - start) / float64(p.members)
	r.steps /= float64(p.members)
	r.evals /= float64(p.members)
	if r.ns == 0 || ns < r.ns {
		r.ns = ns
	}
}

func (p *problem) peer(bin string, r *run) {
	c := exec.Command(bin, p.name, fmt.Sprint(r.rtol), "1")
	var so, se bytes.Buffer
	c.Stdout, c.Stderr = &so, &se
	if err := c.Run(); err != nil {
		fmt.Fprintf(os.Stderr, "peer: %v: %s\n", err, se.String())
		os.Exit(1)
	}
	if err := binary.Read(&so, binary.LittleEndian, r.out); err != nil {
		fmt.Fprintln(os.Stderr, "peer:", err)
		os.Exit(1)
	}
	var ns float64
	fmt.Sscan(se.String(), &ns, &r.steps, &r.evals, &r.failed, &r.events)
	if r.ns == 0 || ns < r.ns {
		r.ns = ns
	}
}

// judge fills r.err and r.late.
func (p *problem) judge(r *run, ref []float64) {
	errs := make([]float64, p.members)
	w := p.n * p.outs
	r.late = 0
	for m := range p.members {
		for k := m * w; k < (m+1)*w; k++ {
			e := math.Abs(r.out[k]-ref[k]) / math.Max(math.Abs(ref[k]), p.scale[k%p.n])
			if !(e <= errs[m]) {
				errs[m] = e
			}
			if math.IsNaN(e) {
				errs[m] = math.Inf(1)
			}
		}
		if errs[m] > 0.02 {
			r.late++
		}
	}
	slices.Sort(errs)
	r.err = errs[len(errs)/2]
}

// at interpolates the time needed for error e; NaN outside the range.
func at(runs []*run, e float64) float64 {
	best := math.NaN()
	for i := 1; i < len(runs); i++ {
		a, b := runs[i-1], runs[i]
		if a.err == b.err || (a.err-e)*(b.err-e) > 0 {
			continue
		}
		x := (math.Log(e) - math.Log(a.err)) / (math.Log(b.err) - math.Log(a.err))
		t := math.Exp(math.Log(a.ns) + x*(math.Log(b.ns)-math.Log(a.ns)))
		if !(t >= best) {
			best = t
		}
	}
	return best
}

func main() {
	bin := flag.String("bin", "", "the compiled peer")
	only := flag.String("only", "", "comma-separated names of problems; all if empty")
	passes := flag.Int("passes", 5, "interleaved passes")
	detail := flag.Bool("v", false, "print every tolerance")
	guard := flag.Bool("guard", true, "stability guard on")
	flag.Parse()
	runtime.LockOSThread()

	problems := []*problem{
		thermostat(),
		standard("robertson", odetest.Robertson(), nil),
		standard("hires", odetest.HIRES(), nil),
		standard("oregonator", odetest.Oregonator(), nil),
		standard("vanderpol", odetest.VanDerPol(), nil),
		standard("brusselator", odetest.Brusselator(20), &ode.Band{Lower: 2, Upper: 2}),
		standard("chain", odetest.Chain(), nil),
	}
	methods := []struct {
		name     string
		m        ode.Method
		analytic bool
	}{{"Rodas5P", ode.Rodas5P, false}, {"Rodas5P, analytic J", ode.Rodas5P, true}, {"Radau IIA(5)", ode.RadauIIA3, false}, {"Radau IIA(9)", ode.RadauIIA5, false}}
	targets := []float64{1e-4, 1e-5, 1e-6, 1e-7, 1e-8, 1e-9, 1e-10}
	fmt.Printf("time of the peer / time of package ode at equal error (guard %v); ? = not reached\n", *guard)
	for _, p := range problems {
		if *only != "" && !slices.Contains(strings.Split(*only, ","), p.name) {
			continue
		}
		times := p.times()
		size := p.n * p.outs * p.members
		ref := &run{rtol: 1e-13, out: make([]float64, size), s: p.solver(ode.RadauIIA7, 1e-13, p.jac != nil, true)}
		p.pass(ref, times)
		if ref.failed > 0 {
			fmt.Printf("%s: %d members of the reference failed\n", p.name, ref.failed)
		}
		var rtols []float64
		for e := -3.0; e >= -11.5; e -= 0.5 {
			rtols = append(rtols, math.Pow(10, e))
		}
		var peer []*run
		own := make([][]*run, len(methods))
		for _, r := range rtols {
			peer = append(peer, &run{rtol: r, out: make([]float64, size)})
			for k, m := range methods {
				if m.analytic && p.jac == nil || m.m == ode.Rodas5P && r < 1e-11 {
					continue
				}
				own[k] = append(own[k], &run{rtol: r, out: make([]float64, size), s: p.solver(m.m, r, m.analytic, *guard)})
			}
		}
		for range *passes {
			for i := range rtols {
				// Short runs are repeated: a pass lasts a few milliseconds.
				p.peer(*bin, peer[i])
				for k := range methods {
					if i < len(own[k]) {
						n := 1
						if p.members == 1 {
							n = 5
						}
						for range n {
							p.pass(own[k][i], times)
						}
					}
				}
			}
		}
		fmt.Printf("\n%-22s", p.name)
		for _, e := range targets {
			fmt.Printf("%9.0e", e)
		}
		fmt.Println()
		all := append([][]*run{peer}, own...)
		for k, rs := range all {
			if len(rs) == 0 {
				continue
			}
			name := "peer, µs"
			for _, r := range rs {
				p.judge(r, ref.out)
			}
			if k > 0 {
				name = methods[k-1].name
			}
			fmt.Printf("%-22s", name)
			for _, e := range targets {
				v := at(rs, e)
				switch {
				case math.IsNaN(v):
					fmt.Printf("%9s", "?")
				case k == 0:
					fmt.Printf("%9.1f", v/1e3)
				default:
					q := at(peer, e) / v
					if math.IsNaN(q) {
						fmt.Printf("%9s", "∞")
						continue
					}
					fmt.Printf("%9.2f", q)
				}
			}
			fmt.Println()
			if *detail {
				for _, r := range rs {
					fmt.Printf("   rtol %8.1e: %9.1f µs, error %8.1e, %7.1f steps, %8.1f evaluations, late %d, failed %d, events %d\n",
						r.rtol, r.ns/1e3, r.err, r.steps, r.evals, r.late, r.failed, r.events)
				}
			}
		}
	}
}
