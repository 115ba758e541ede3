//go:build race

package ode

const raceEnabled = true
