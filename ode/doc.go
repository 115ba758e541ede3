// Package ode integrates stiff initial value problems dy/dt = f(t, y), locates
// events, and never follows a state that has become unstable.
package ode
