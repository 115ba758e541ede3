package ode

import (
	"errors"
	"fmt"
	"math"
)

// Func evaluates the right-hand side dy/dt = f(t, y) into dydt. A NaN or an
// infinity in dydt means that (t, y) lies outside the domain of f; the solver
// then shortens the step. Func must neither keep nor change y.
type Func func(dydt []float64, t float64, y []float64)

// JacFunc evaluates the Jacobian ∂f/∂y into jac and the explicit time
// derivative ∂f/∂t into dfdt. Without Problem.Band, jac is dense and
// row-major: jac[i*n+j] = ∂f_i/∂y_j. With a band it has n rows of
// Lower+Upper+1 entries and ∂f_i/∂y_j is jac[i*(Lower+Upper+1)+j-i+Lower].
// Both arrive filled with zeros. dfdt is ignored if Problem.Autonomous.
type JacFunc func(jac, dfdt []float64, t float64, y []float64)

// Band gives the number of sub- and superdiagonals of a banded Jacobian.
type Band struct{ Lower, Upper int }

// Problem says what to solve. Its functions are called from one goroutine;
// what they close over may change between runs, so that one Problem and one
// Solver serve a whole ensemble.
type Problem struct {
	Dim  int     // number of components n
	Func Func    // right-hand side
	Jac  JacFunc // Jacobian; nil means finite differences

	// Autonomous promises that f does not depend on t, which saves one
	// evaluation a step when the Jacobian comes from differences.
	Autonomous bool

	Band   *Band // nil means a dense Jacobian
	Events []Event

	// StopTimes are times at which f is discontinuous in t, in any order. A
	// step ends exactly there, sees f only from the side it comes from, and
	// the next step starts afresh from the other side.
	StopTimes []float64
}

// Method names an integration formula.
type Method int

const (
	// Rodas5P is the Rosenbrock method of order 5 of Steinebach (2023).
	Rodas5P Method = iota
	// RadauIIA3 is the three-stage Radau IIA method, order 5.
	RadauIIA3
	// RadauIIA5 is the five-stage Radau IIA method, order 9.
	RadauIIA5
	// RadauIIA7 is the seven-stage Radau IIA method, order 13.
	RadauIIA7
)

func (m Method) String() string {
	switch m {
	case Rodas5P:
		return "Rodas5P"
	case RadauIIA3:
		return "Radau IIA(5)"
	case RadauIIA5:
		return "Radau IIA(9)"
	case RadauIIA7:
		return "Radau IIA(13)"
	}
	return fmt.Sprintf("Method(%d)", int(m))
}

// Settings tunes a run. The zero value is a sensible default.
type Settings struct {
	Method Method

	// RelTol is the relative error allowed per step; 0 means 1e-6.
	RelTol float64

	// AbsTol is the noise floor: below it a component is not resolved
	// relatively. One value for all components or one each; nil means
	// 1e-3·RelTol of the largest |y_i| seen so far in the run, which suits
	// components that do not start near zero.
	AbsTol []float64

	InitialStep float64 // length of the first step; 0 means chosen by the solver
	MaxStep     float64 // longest step; 0 means no bound
	MinStep     float64 // shortest step; 0 means the spacing of floating-point time
	MaxSteps    int     // most attempted steps of a run; 0 means 100 000
	MaxEvents   int     // most fired events of a run; 0 means 100 000

	// NonNegative lists components that may not fall below zero. A step that
	// ends below -AbsTol is rejected; an end between -AbsTol and 0 is set to 0.
	NonNegative []int

	// Dense holds the dense output to the tolerance also inside steps whose
	// ends are more accurate than their inside. It is implied by IntegrateAt
	// and by events.
	Dense bool

	Guard Guard
}

// Guard tunes the stability guard; see the package documentation.
type Guard struct {
	Off bool

	// Blocks are index sets. The diagonal block of the Jacobian on each set
	// is tested by itself, the other components held fixed. nil means one
	// block: the whole Jacobian.
	Blocks [][]int

	// Locate is the precision, relative to max(|t|, |t−t0|), to which a loss
	// of stability is located; 0 means RelTol/10.
	Locate float64
}

// Direction says which crossings of an event function count.
type Direction int

const (
	Both    Direction = iota // every crossing
	Rising                   // from negative to positive along the run
	Falling                  // from positive to negative along the run
)

// Event is a condition Func(t, y) = 0 to be found on the way.
type Event struct {
	Name      string
	Func      func(t float64, y []float64) float64
	Direction Direction

	// Terminal is 0 for an event that never stops the run, k to stop it at
	// the k-th firing.
	Terminal int

	// Apply, if not nil, is called at the event and may change y. The run
	// then restarts from the changed state.
	Apply func(t float64, y []float64)
}

// EventRecord tells of one fired event.
type EventRecord struct {
	Index  int // in Problem.Events
	Name   string
	T      float64   // time of the crossing
	Y      []float64 // state at T before Apply; overwritten by the next run
	Rising bool      // sense of the crossing
}

// Loss tells where the solution became unstable, or stable again.
type Loss struct {
	T         float64 // time at which the growth rate passes zero
	Rate      float64 // real part of the growing eigenvalue just after T, 1/time
	Frequency float64 // its imaginary part, 1/time

	// Mode is the growing direction, of length Dim and zero outside the
	// block: unit Euclidean length after division by the error weights
	// AbsTol + RelTol·|y|, then multiplied by them again. For a complex pair
	// it is the real part of the eigenvector. Overwritten by the next run.
	Mode []float64

	Block    int  // in Guard.Blocks; 0 for the whole Jacobian
	Growing  int  // number of growing eigenvalues after T
	Regained bool // true when the last growing mode ceased to grow at T
}

// Status says why a run ended.
type Status int

const (
	Running    Status = iota // not ended
	Reached                  // reached the end of the interval
	Terminated               // stopped by a terminal event
	Failed                   // ended by an error
)

func (s Status) String() string {
	switch s {
	case Running:
		return "running"
	case Reached:
		return "reached end"
	case Terminated:
		return "terminated by an event"
	case Failed:
		return "failed"
	}
	return fmt.Sprintf("Status(%d)", int(s))
}

// Stats counts the work of a run.
type Stats struct {
	Steps int // accepted steps

	// Rejected attempts by cause.
	RejectedError     int // error estimate above tolerance
	RejectedNonFinite int // NaN or infinity from f, its Jacobian or the new state
	RejectedNewton    int // Newton iteration did not converge (Radau)
	RejectedSingular  int // iteration matrix singular
	RejectedStability int // a growing mode was not resolved
	RejectedDomain    int // a NonNegative component fell below its floor

	Retaken int // steps taken again shorter, to locate events and losses of stability

	FuncEvals      int // including those for difference Jacobians
	JacEvals       int
	Factorizations int
	Solves         int
	EventEvals     int // event functions evaluated
	EigenEvals     int // full eigenvalue computations of the guard
	Projections    int // NonNegative components set to zero from just below

	MinStep, MaxStep, LastStep float64 // lengths of accepted steps

	// Limiting counts, for each component, the attempts in which it had the
	// largest error estimate. It is a view, overwritten by the next run.
	Limiting []int
}

// Rejected returns the number of rejected attempts of all causes.
func (s *Stats) Rejected() int {
	return s.RejectedError + s.RejectedNonFinite + s.RejectedNewton +
		s.RejectedSingular + s.RejectedStability + s.RejectedDomain
}

// Result tells how a run ended. Its slices are views, overwritten by the next
// run of the same Solver.
type Result struct {
	T      float64 // time reached; y is valid there also after an error
	Status Status
	Stats  Stats
	Events []EventRecord
	Losses []Loss
}

// Causes of failure, wrapped in a *StepError (or, for ErrBadInput, in an error
// that says what was wrong).
var (
	ErrStepTooSmall  = errors.New("step fell below the smallest allowed")
	ErrMaxSteps      = errors.New("too many steps")
	ErrNotFinite     = errors.New("right-hand side is not finite")
	ErrSingular      = errors.New("iteration matrix stays singular")
	ErrTooManyEvents = errors.New("events accumulate")
	ErrBadInput      = errors.New("bad input")
)

// StepError says where and why a run failed. The state of the solver is valid
// at T.
type StepError struct {
	T         float64 // time reached
	H         float64 // length of the last attempted step, signed
	ErrNorm   float64 // its error estimate divided by the tolerance; NaN if there is none
	Component int     // component that limited the step; -1 if none did
	Cause     string  // what rejected the last attempt; empty if it was accepted
	Err       error   // one of the causes of failure above
	Stats     Stats
}

func (e *StepError) Error() string {
	m := fmt.Sprintf("ode: %v at t = %.17g (h = %.3g", e.Err, e.T, e.H)
	if !math.IsNaN(e.ErrNorm) {
		m += fmt.Sprintf(", error %.3g of tolerance", e.ErrNorm)
	}
	if e.Component >= 0 {
		m += fmt.Sprintf(", component %d", e.Component)
	}
	if e.Cause != "" {
		m += ", last attempt: " + e.Cause
	}
	return m + fmt.Sprintf("; %d steps, %d rejected)", e.Stats.Steps, e.Stats.Rejected())
}

// Unwrap returns the cause.
func (e *StepError) Unwrap() error { return e.Err }

func badInput(format string, args ...any) error {
	return fmt.Errorf("ode: %w: %s", ErrBadInput, fmt.Sprintf(format, args...))
}
