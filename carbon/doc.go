// Package carbon couples the carbonate-silicate cycle, the energy balance, the
// star and the interior of a rocky planet, integrates its history and says what
// became of it.
//
// [Setup] holds everything a history depends on, [Run] computes it, the result
// is plain data of package record. The laws live below, one a file; this table
// leads to each.
//
//	what                        equation                                            where
//	temperature                 c dT/dt = (S/4)(1 − A) − F                          Model.derivative
//	surface carbon              dC/dt = ridge + arc + metamorphic − W_l − W_s       Model.derivative
//	seafloor carbonate          dC/dt = W_s + δ W_l − subducted                     Model.derivative
//	continental carbonate       dC/dt = (1 − δ) W_l − metamorphic − foundered       Model.derivative
//	mantle carbon               dC/dt = subducted − arc + foundered − ridge         Model.derivative
//	land, biology through time  x = x₁ + (x₂ − x₁)·½[1 + tanh((t − t_m)/w)]         Step
//	sinks under ice and low CO₂ W = W₀ (A/A_E) f i p/(p + p_ℓ) w(T, p)              Model.weather
//	sunlight                    S = S₀ L (1 au/d)²/√(1 − e²)                        star.Sunlight
//	luminosity                  L(t)                                                star.Laws
//	zone limits                 S_eff(T*)                                           star.Zones
//	outgoing radiation          F(T, p)                                             climate.Radiations
//	planetary albedo            A(T, p)                                             climate.Albedos
//	reference balance           (S₀/4)(1 − A) = F at T₀, p₀                         climate.SolveFree
//	weathering on land          w(T, p) = W/W₀                                      weathering.Land
//	weathering of the seafloor  w(T, p, s) = W/W₀                                   weathering.Seafloor
//	outgassing                  F = k s C per reservoir                             outgas.Laws
//	land carbonate to seafloor  δ = (ridge + arc − W_s)/W_l                         outgas.Reference
//	mantle cooling              M c dT/dt = M H − Q                                 interior.Laws
//	mass to radius, gravity     R = (1.07 − 0.21 CMF) M^(1/3.7)                     interior.NewPlanet
//	carbon, pCO₂ and pH         C = n_a p + M_o([CO₂] + [HCO₃] + [CO₃])             ocean.Laws
//	stability of a climate      ∂(dT/dt)/∂T at fixed carbon                         Model.growth
//	warm branch's end           growth = 0 along the energy balance                 Model.coldFold
//	radiation limit             max over T of 4F/(1 − A)                            Model.radiationLimit
//	gain, response time         d ln W/d ln p, −1/λ                                 Model.strength
//
// Time is the age of the star. A history starts from an equilibrium and ends at
// a lasting failure of the climate, at the end of the main sequence or where
// the radiation law ends. What the model leaves out: latitude, seasons, clouds
// that change, ice dynamics, gases other than CO₂ and water, oxygen and organic
// carbon, and escape of anything but what a scenario asks for.
package carbon
