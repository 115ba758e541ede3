// Package ode integrates stiff initial value problems
//
//	dy/dt = f(t, y),  y(t0) = y0
//
// with few to some dozens of components. It locates events, and it watches for
// solutions that have become unstable.
//
// A [Problem] says what to solve, [Settings] how; [NewSolver] makes all memory
// and a [Solver] runs any number of times without allocating. [Solver.Integrate]
// goes to the end, [Solver.IntegrateAt] writes the state at given times, and
// [Solver.Init] with [Solver.Step] takes one accepted step at a time. Errors
// wrap one of a few named causes; a [*StepError] tells time, step, component
// and cause, and the state is valid up to there.
//
// # Methods
//
// [Rodas5P], the default, is the Rosenbrock method of order 5 of G. Steinebach
// (BIT Numerical Mathematics 63 (2023) 27). It solves no nonlinear equations
// and is the best choice for relative errors down to about 1e-6.
//
// [RadauIIA3], [RadauIIA5] and [RadauIIA7] are the collocation methods Radau IIA
// of orders 5, 9 and 13 (E. Hairer and G. Wanner, Solving Ordinary Differential
// Equations II (1996), IV.5 and IV.8). Their error is usually ten to a thousand
// times below RelTol. RadauIIA5 is the better choice for errors below 1e-6,
// RadauIIA7 below 1e-10 and for references.
//
// All are L-stable and stiffly accurate. The step controller is that of Hairer
// and Wanner, IV.8, with Gustafsson's prediction.
//
// # Tolerances
//
// A step is accepted if the root mean square of its error estimates, each
// divided by AbsTol + RelTol·|y|, is at most one. AbsTol is the noise floor: the
// size below which a component does not matter. A component that starts at zero
// should have one.
//
// Jacobians come from differences unless [Problem.Jac] is given, which saves the
// Rosenbrock method more than a third of its evaluations. A NaN from f means
// "outside the domain" and shortens the step. Do not clamp y inside f: declare
// the component in [Settings.NonNegative], or clamp a local copy where a root or
// a logarithm needs it.
//
// # Events
//
// An [Event] function is sampled at the ends and at three points inside each
// step, and minimised where it comes near zero without changing sign. A crossing
// is located by taking the step again with other lengths, so its time is as
// good as the integration, also where the dense output is not; the step then
// ends on the far side of the crossing. Events that cross within the precision
// of location fire together. A zero exactly at the end of a step belongs to
// that step. Missed are pairs of crossings between samples that neither the
// samples nor their neighbourhood betray: for event functions that oscillate
// faster than the solution, set MaxStep.
//
// With events, with IntegrateAt or with [Settings.Dense] the error inside a step
// is held to the tolerance too. Otherwise only ends of steps are, and
// [Solver.Interpolate] may be poor for a fast component that follows a slow
// one. Times at which f jumps belong into [Problem.StopTimes].
//
// # The stability guard
//
// A method that is L-stable damps what decays fast; with long steps it damps
// also what grows fast. It then follows a state that has lost its stability as
// if nothing had happened, and no tolerance warns of it: the error of a step
// along that state is small. (G. Dahlquist and co-workers described this as
// super-stability about 1982.) The guard looks at the Jacobian at the end of
// every step:
//
//   - If the number of growing modes rises within the step, the step is
//     shortened to end at the loss of stability, which is reported as a [Loss]
//     with its time, its rate and the direction of the growing mode. Its end is
//     reported likewise.
//   - While a mode grows, a step is refused if it does not reproduce the growth.
//     After 750 e-foldings without effect nothing is left that could grow, and
//     the mode is released.
//
// Growth that the step resolves, however fast, costs nothing: y' = y takes the
// same steps with the guard and without.
//
// What is looked at: [Guard.Blocks], or the whole Jacobian. Blocks of up to four
// components are judged by the Routh–Hurwitz criterion at every step, and by
// their eigenvalues where that leaves doubt. Larger ones are judged by diagonal
// dominance in some scaling, up to eight components by the Routh–Hurwitz
// criterion, then by their eigenvalues; where dominance does not hold, a closer
// look is taken only when an entry has changed by a fifth, and in between the
// sign of a determinant shows an odd number of real growing modes. Of a whole
// Jacobian of more than sixteen components only the determinant is looked at;
// name blocks to see more.
//
// What the guard proves: at the end of each step, with the Jacobian there, and
// with the tests above, no mode grows unreported. What it does not: that nothing
// happened inside the step (a window of instability shorter than the step is
// found only if the step is bounded by MaxStep); that the eigenvalues of a
// Jacobian that changes with time tell the whole truth (they do if it changes
// slowly compared with them); that a solution leaves at the right time when what
// makes it leave is smaller than AbsTol. A date of departure is sensitive to
// such perturbations, the date of the loss is not.
package ode
