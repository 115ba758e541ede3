// Package weathering holds the published laws of silicate weathering on land
// and on the seafloor, one law a file. W/W₀ is the flux relative to the
// reference state, p the CO₂ partial pressure, T the global mean surface
// temperature, ΔT = T − T₀; subscript 0 is the reference state.
//
// On land:
//
//	walker1981            (p/p₀)^β · exp(ΔT/Tₑ)                                  Walker, Hays & Kasting 1981
//	berner1994            f(p) · exp(k ΔT) · [1 + ε ΔT]^a                        Berner 1994, GEOCARB II
//	arrhenius_runoff      (p/p₀)^β · exp(−(E/R)(1/T − 1/T₀)) · [1 + ε ΔT]        White & Blum 1995
//	menou2015             (p/p₀)^β · exp(k ΔT) · [1 + ε ΔT]^a                    Menou 2015
//	krissansentotton2017  (p/p₀)^α · exp(ΔT/Tₑ)                                  Krissansen-Totton & Catling 2017
//	foley2015             (1 − exp(−κ k))/(1 − exp(−κ)), k kinetic               Foley 2015
//	west2012              1 − exp(−K (1 − exp(−k_w q)) k(T) (z/E)^σ/σ)           West 2012
//	graham2020            α/[1/k_eff + m A t_s + α/(q C_eq)]                     Graham & Pierrehumbert 2020
//	abbot2012             (p/p₀)^b · exp(ΔT/Tᵤ) · [1 + a_p ΔT]^a                 Abbot, Cowan & Ciesla 2012
//	Supply, a wrapper     (1 − exp(−κ k))/(1 − exp(−κ)), k any law of land       Foley 2015
//
// On the seafloor, with crust production s, deep-ocean temperature T_d and pore
// temperature Tₚ = T_d + 9 K:
//
//	coogan2015            s^ν · (p/p₀)^α · exp(−(E/R)(1/Tₚ − 1/Tₚ₀))             Coogan & Dosso 2015
//	none                  0                                                      no seafloor weathering
//	brady1997             s^ν · (p/p₀)^α · exp(−(E/R)(1/T_d − 1/T_d₀))           Brady & Gislason 1997
//	sleep2001             s^ν · (p/p₀)^α                                         Sleep & Zahnle 2001
//	krissansentotton2018  s^β · exp(−(E/R)(1/Tₚ − 1/Tₚ₀)) · ([H⁺]/[H⁺]₀)^γ       Krissansen-Totton, Arney & Catling 2018
//
// Every law is normalised to its own value at the reference state, so that its
// relative flux there is exactly 1. Land fraction, biology, the part of a
// surface under ice and the limiter at vanishing CO₂ are applied outside, in
// package carbon, alike for all laws.
//
// T₀ and p₀ are those of the scenario; where a paper has other ones (285 K,
// 330 µbar) the doc comment of the law says so. A bracket like [1 + ε ΔT] is the
// published one from 0.1 upwards and falls off exponentially, with the same
// slope, below: runoff never turns negative (own choice; it matters some 20 K
// below the reference, where the papers are silent).
//
// To add a law: write its file, add its row to Land or Seafloor and to the table
// above, and give it a check value in checks_test.go.
package weathering
