//go:build !race

package ode

const raceEnabled = false
