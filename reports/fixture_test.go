package reports

import (
	"fmt"
	"math"
	"strings"

	"cycle/carbon/record"
)

// The runs below are invented: shapes drawn by hand, planets, authors and laws
// that do not exist. They are not output of the model.

var none = math.NaN()

// orrindel is a planet that stays temperate, loses its plants, and ends moist.
func orrindel() *record.Run {
	r := &record.Run{
		Format: 1, Title: "Orrindel, a middle orbit", Name: "orrindel", Hash: "4f2a91c07be35d18", Version: "0.1.0-test", Seed: 7,
		Outcome: record.Outcome{Kind: record.MoistGreen, TimeGyr: 5.9412, ErrorGyr: 0.0003,
			Sentence: "Orrindel keeps liquid water for 5.64 Gyr and then turns into a moist greenhouse.",
			Why:      "The star brightened past what the thermostat can offset: CO₂ was already below 10 ppm, so weathering had nothing left to give."},
		Start:      record.State{AgeGyr: 0.3, TemperatureK: 291.4, PCO2Bar: 0.31, PH: 6.61, Outgassing: 21.7, Land: 14.2, Seafloor: 7.5, MantleK: 1952, Reached: true},
		StartWords: "equilibrium at 0.300 Gyr, reached from the warm side",
		Reference:  record.State{AgeGyr: 4.57, TemperatureK: 288, PCO2Bar: 2.8e-4, PH: 8.17, Outgassing: 7.5, Land: 5.6, Seafloor: 1.9, MantleK: 1623, Residual: 2e-10, Solved: "total carbon = 9840 Emol", Reached: true},
		Feedback:   record.Feedback{Gain: 0.412, ResponseKyr: 236, Sensitivity: 4.31, Forcing: 3.94, AtStateOf: "4.570 Gyr"},
		Episodes:   []record.Episode{{State: record.StateTemperate, Start: 0.3, End: 5.9412}, {State: record.StateMoist, Start: 5.9412, End: 6.3}},
		Marks: []record.Mark{
			{Name: record.MarkSupply, TimeGyr: 0.71, ErrorGyr: 0.002},
			{Name: record.MarkC3, TimeGyr: 4.861, ErrorGyr: 0.0004},
			{Name: record.MarkC4, TimeGyr: 5.702, ErrorGyr: 0.0005},
			{Name: record.MarkDynamo, TimeGyr: 5.75, ErrorGyr: none},
			{Name: record.MarkMoist, TimeGyr: 5.9412, ErrorGyr: 0.0003},
		},
		Margins: []record.Margin{
			{Boundary: "radiation limit", Side: "hot", TimeGyr: 5.9412, Value: 6.2, Unit: "%", Words: "On the hot side sunlight came within 6.2 % of the radiation limit, at 5.941 Gyr."},
			{Boundary: "cold fold", Side: "cold", TimeGyr: 1.12, Value: 2.31, Unit: "", Words: "On the cold side outgassing never fell below 2.31 times what the warm state needs, at 1.120 Gyr."},
		},
		ZoneLaw: "an invented zone law",
		Zones: []record.Zone{
			{Name: "Recent Venus", Inner: true, Crossed: []float64{}},
			{Name: "inner, conservative", Inner: true, Conserv: true, Crossed: []float64{5.31}},
			{Name: "outer, conservative", Conserv: true, Crossed: []float64{}},
			{Name: "Early Mars", Crossed: []float64{}},
		},
		Stays:       []record.Stay{{Name: "conservative", EnterGyr: 0.3, LeaveGyr: 5.31, Inside: true}, {Name: "optimistic", EnterGyr: 0.3, LeaveGyr: 6.3, Inside: true}},
		CarbonMol:   9.84e21,
		CarbonDrift: 3.1e-13,
		Solver: record.Solver{Method: "Rodas5P", RelTol: 1e-5, Steps: 812, Rejected: map[string]int{"error": 31, "guard": 2}, FuncEvals: 7311, MinStepYr: 12.5, MaxStepYr: 2e7,
			Limiting: map[string]int{"temperature": 288, "surface carbon": 524}, Guard: true, Status: "finished", TightenedTol: 1e-6},
		Laws: []record.Law{
			{Part: "star", Name: "gough1981", Doc: "luminosity of the star against age", Form: "L = L₀ / (1 + 0.4 (1 − t/t₀))", Source: "Ashgrove 2099", Range: "0 to 9 Gyr"},
			{Part: "land weathering", Name: "walker1981", Doc: "power of pCO₂ times an exponential in temperature", Form: "W/W₀ = (p/p₀)^β exp((T − T₀)/Tₑ)", Source: "Ashgrove & Pell 2098", Range: "260 to 320 K"},
		},
		Warnings: []record.Warning{
			{About: "land weathering", Words: "used 6.1 K above its published range after 5.812 Gyr"},
			{About: "radiation", Words: "the fit was extended below its lowest CO₂ (1e-5 bar) after 5.702 Gyr"},
			{About: "water", Words: "loss of water is not followed; the moist state ends the history"},
		},
		Inputs: []record.Input{
			{Key: "orbit.distance", Value: "1 au", Doc: "mean distance from the star", Origin: "default", Source: "definition", Allowed: "0.1 to 10 au"},
			{Key: "weathering.land.exponent", Value: "0.3", Doc: "exponent β of pCO₂", Origin: "built-in", Source: "Ashgrove & Pell 2098", Allowed: "0 to 1"},
			{Key: "weathering.land.efold", Value: "20 K", Doc: "temperature for a factor e", Origin: "--set", Source: "Ashgrove & Pell 2098", Allowed: "5 to 50 K", Outside: true},
			{Key: "carbon.total", Value: "9840 Emol", Doc: "carbon over all reservoirs", Origin: "solved", Source: "so that the reference state is met", Allowed: "above 0 Emol"},
		},
		Works: []record.Work{
			{Key: "ashgrove2099", Text: "Ashgrove, M. 2099. An invented law of stars. Journal of Imaginary Results 12, 1-9.", BibTeX: "@article{ashgrove2099,\n  author = {Ashgrove, M.},\n  title = {An invented law of stars},\n  year = {2099}\n}"},
			{Key: "ashgrove2098", Text: "Ashgrove, M., Pell, O. 2098. Weathering that never was. Journal of Imaginary Results 11, 40-52.", BibTeX: "@article{ashgrove2098,\n  author = {Ashgrove, M. and Pell, O.},\n  title = {Weathering that never was},\n  year = {2098}\n}"},
		},
		Command:         "cycle run orrindel --set weathering.land.efold=\"20 K\"",
		ReferenceAgeGyr: 4.57,
		Scenario:        "title = \"Orrindel, a middle orbit\"\n\n[orbit]\ndistance = \"1 au\"\n\n[weathering.land]\nexponent = 0.3\nefold = \"20 K\"\n",
	}
	const n = 900
	for i := range n {
		t := 0.3 + 6.0*float64(i)/(n-1)
		r.Rows = append(r.Rows, invented(t, 0, 1))
	}
	r.Recoveries = []record.Recovery{{Pulse: "40 Tmol/yr of carbon", StartGyr: 3.2, EndGyr: 3.21, PeakKelvin: 9, PeakLnCO2: 0.4, RecoveryKyr: 310}}
	// A burst of carbon that lasts a moment: the thinned curve must keep it.
	for i := range r.Rows {
		if t := r.Rows[i].Age / 1e9; t > 3.2 && t < 3.21 {
			r.Rows[i].Pulse = 40e12
			r.Rows[i].Outgassing += 40e12
			r.Rows[i].Temperature += 9
		}
	}
	return r
}

// invented draws one row by hand. Frozen says how deep in a freeze it is, 0 to 1.
func invented(t, frozen, outgas float64) record.Row {
	var r record.Row
	r.Age = t * 1e9
	r.Sunlight = 1361 / (1 + 0.4*(1-t/4.57))
	s := r.Sunlight / 1361
	r.PCO2 = math.Exp(-8.2 + 8.4*(1-s)*4 + 0.5*math.Sin(3*t)) // falls as the star brightens
	r.Temperature = 288 + 3*math.Sin(1.3*t) + math.Max(0, t-5)*math.Max(0, t-5)*45
	r.Temperature -= frozen * 62
	r.PCO2 *= math.Exp(4 * frozen)
	r.Albedo = 0.3 + 0.35*frozen
	r.Ice = frozen
	r.Absorbed = r.Sunlight / 4 * (1 - r.Albedo)
	r.Outgoing = r.Absorbed + 0.01*math.Sin(40*t)
	r.PH = 8.2 - 0.9*math.Log10(r.PCO2/2.8e-4)*0.55
	r.DIC, r.Alk, r.Omega = 2.1e-3, 2.4e-3, 4.1
	heat := 38e12 * math.Exp(-(t-4.57)/3.1)
	r.HeatFlow, r.Radiogenic = heat, 0.55*heat
	r.MantleTemperature = 1623 + 75*(4.57-t)
	r.Crust = heat / 38e12
	r.Ridge, r.Arc, r.Metamorphic = 2.6e12*r.Crust*outgas, 3.1e12*r.Crust*outgas, 1.8e12*outgas
	r.Outgassing = r.Ridge + r.Arc + r.Metamorphic
	r.Land, r.Seafloor = r.Outgassing*0.74*(1-frozen), r.Outgassing*0.25*(1-0.9*frozen)
	r.Imbalance = r.Outgassing - r.Land - r.Seafloor
	r.Deposited, r.Subducted = 0.9*r.Land, 0.8*r.Land
	r.Surface, r.SeafloorCarbon = 3.2e18*math.Pow(r.PCO2/2.8e-4, 0.2), 2.1e20+4e19*t
	r.Continental, r.Mantle = 4e21+3e20*t, 5e21-3e20*t
	r.Total = 9.84e21
	r.LandFraction, r.Biology = 1, 1
	r.SupplyUse = 0.4 + 0.7*math.Exp(-3*(t-0.3))
	r.CoreTemperature = none // this run follows no core
	r.Flux = s
	r.RecentVenus, r.InnerConservative, r.OuterConservative, r.EarlyMars = 1.78+0.01*t, 1.05+0.004*t, 0.343, 0.318
	r.WarmNeeds = r.Outgassing / (2.31 + 0.8*math.Abs(t-1.12)) / outgas
	r.ColdMargin = (2.31 + 0.8*math.Abs(t-1.12)) * outgas
	r.ColdKelvin = (22 + 3*math.Abs(t-1.12)) * (1 - 2*frozen)
	r.HotMargin = 0.55 - 0.09*t
	r.Water = 1.4e21 - 1e20*math.Max(0, t-5.9)
	r.Moisture = 3e-6 * math.Exp(0.12*(r.Temperature-288))
	r.Gain = 0.41 + 0.02*math.Sin(t)
	r.Response = 2.36e5
	if t < 0.4 {
		r.HotMargin = none // a gap
	}
	return r
}

// quessmere freezes and thaws forty times.
func quessmere() *record.Run {
	r := orrindel()
	r.Title, r.Name, r.Hash = "Quessmere, a cold outer orbit", "quessmere", "90cc17d2aa04e6f3"
	r.Command = "cycle run quessmere"
	r.Rows, r.Episodes, r.Marks, r.Recoveries = nil, nil, nil, nil
	const cycles, perCycle = 40, 125
	begin, period := 1.2, 0.09
	r.Outcome = record.Outcome{Kind: record.LimitCycles, TimeGyr: begin, ErrorGyr: 2e-5,
		Sentence: "Quessmere falls into limit cycles: it freezes and thaws 40 times and spends most of the time frozen.",
		Why:      "Outgassing of 4.1 Tmol/yr is less than the 5.2 Tmol/yr the warm state needs on this orbit."}
	r.Freezes, r.FrozenShare = cycles, 0.655
	r.Margins = []record.Margin{{Boundary: "cold fold", Side: "cold", TimeGyr: begin, Value: 0.79, Unit: "", Words: "The warm state needs 1.27 times the outgassing the planet has, from 1.200 Gyr on."}}
	r.Reference = record.State{AgeGyr: 4.57, TemperatureK: 231.2, PCO2Bar: 0.061, PH: 7.02, Outgassing: 4.1, Land: 0, Seafloor: 0.4, MantleK: 1623, Reached: true}
	r.Marks = append(r.Marks, record.Mark{Name: record.MarkOutgassing, TimeGyr: 1.13, ErrorGyr: 1e-5})
	r.Episodes = append(r.Episodes, record.Episode{State: record.StateTemperate, Start: 0.3, End: begin})
	for i := range 200 {
		r.Rows = append(r.Rows, invented(0.3+(begin-0.3)*float64(i)/200, 0, 0.5))
	}
	for k := range cycles {
		t0 := begin + period*float64(k)
		cold, warm := t0, t0+0.7*period
		r.Marks = append(r.Marks, record.Mark{Name: record.MarkBranchLost, TimeGyr: cold, ErrorGyr: 1e-5}, record.Mark{Name: record.MarkFroze, TimeGyr: cold + 1e-6, ErrorGyr: 1e-5}, record.Mark{Name: record.MarkThawed, TimeGyr: warm, ErrorGyr: 1e-5})
		r.Episodes = append(r.Episodes, record.Episode{State: record.StateSnowball, Start: cold, End: warm}, record.Episode{State: record.StateTemperate, Start: warm, End: t0 + period})
		for i := range perCycle {
			t := t0 + period*float64(i)/perCycle
			frozen := 0.0
			if t >= cold && t < warm {
				frozen = 0.75 + 0.25*(t-cold)/(warm-cold)
			}
			row := invented(t, frozen, 0.5)
			r.Rows = append(r.Rows, row)
		}
	}
	return r
}

// absurd is a run no physics could give. A report that computed anything would
// show other numbers than these.
func absurd() *record.Run {
	r := orrindel()
	r.Title, r.Name = "Absurd", "absurd"
	r.Outcome = record.Outcome{Kind: record.Snowball, TimeGyr: -3.25, ErrorGyr: 0.5, Sentence: "It froze before it began.", Why: "Because the record says so."}
	r.Start = record.State{AgeGyr: -7, TemperatureK: -12.5, PCO2Bar: 77, PH: 19, Outgassing: -8.25, Land: 1e9, Seafloor: 3, MantleK: 5, Reached: true}
	r.Reference = record.State{AgeGyr: 88, TemperatureK: 123456, PCO2Bar: -4e-6, PH: -2.5, Outgassing: 6e-7, Land: -11, Seafloor: 0.125, MantleK: -40, Reached: true}
	r.ReferenceAgeGyr = 88
	r.Feedback = record.Feedback{Gain: -17, ResponseKyr: 1e-9, Sensitivity: 999, Forcing: -3, AtStateOf: "nowhere"}
	r.Episodes = []record.Episode{{State: record.StateRunaway, Start: -9, End: -4}, {State: record.StateSnowball, Start: -4, End: 91}}
	r.Marks = []record.Mark{{Name: record.MarkThawed, TimeGyr: 66, ErrorGyr: 7}, {Name: record.MarkFroze, TimeGyr: 67, ErrorGyr: 8}}
	r.Margins = []record.Margin{{Boundary: "cold fold", Side: "cold", TimeGyr: 41, Value: -350, Unit: "K", Words: "It was 350 K past the fold and did not mind."}}
	r.Recoveries = nil
	r.FrozenShare, r.Freezes, r.CarbonDrift, r.CarbonMol = 3.5, -2, 1e6, -1
	r.Rows = nil
	for i := range 5 {
		var row record.Row
		row.Age = float64(i-2) * 4e10
		row.Temperature = float64(1000 * (i + 1))
		row.PCO2 = float64(i) - 1
		row.Sunlight, row.PH, row.Outgassing, row.Land, row.Seafloor, row.Imbalance = -1, 21, -5e12, 6e12, -7e12, 1e15
		row.Ridge, row.Arc, row.Metamorphic = 1e12, 2e12, 4e12 // not the outgassing above
		row.Surface, row.Total = 1e18, 3e18
		row.MantleTemperature, row.HeatFlow, row.ColdMargin, row.ColdKelvin, row.HotMargin = 17, -3e12, -4, -350, math.Inf(1)
		row.Flux = 12
		r.Rows = append(r.Rows, row)
	}
	return r
}

// hostileTexts are what a title or any other text of a scenario may hold.
var hostileTexts = []string{
	`</script><img src=x onerror="window.HURT=1">`,
	`__f__(window.HURT=2,'x')__f__`,
	`"'` + "`" + `${window.HURT=3}<!--<script>window.HURT=4</script>`,
	"\u202eright to left\u202c שלום مرحبا",
	"@colour @state.snowball {{.}} {b} %s %n",
	"\x1b[31mred\x07\r\nnew line\u2028\x00end",
	"]]>*/ </style><svg onload=window.HURT=5> javascript:window.HURT=6",
	strings.Repeat("ten thousand ", 770),
	strings.Repeat("x", 10000),
	"=cmd|' /C calc'!A0",
}

// hostile puts one text into every text field of a run.
func hostile(text string) *record.Run {
	r := orrindel()
	r.Title, r.Name, r.Hash, r.Version, r.Command, r.StartWords, r.ZoneLaw, r.Scenario = text, text, text, text, text, text, text, text
	r.Outcome.Kind, r.Outcome.Sentence, r.Outcome.Why = record.Kind(text), text, text
	r.Reference.Solved, r.Feedback.AtStateOf, r.Solver.Method, r.Solver.Status = text, text, text, text
	r.Solver.Rejected, r.Solver.Limiting = map[string]int{text: 3}, map[string]int{text: 4}
	for i := range r.Episodes {
		r.Episodes[i].State = text
	}
	for i := range r.Marks {
		r.Marks[i].Name = fmt.Sprint(text, i)
	}
	for i := range r.Margins {
		r.Margins[i] = record.Margin{Boundary: text, Side: text, TimeGyr: 1, Value: 2, Unit: text, Words: text}
	}
	for i := range r.Zones {
		r.Zones[i].Name = text
	}
	for i := range r.Stays {
		r.Stays[i].Name = text
	}
	for i := range r.Recoveries {
		r.Recoveries[i].Pulse = text
	}
	for i := range r.Laws {
		r.Laws[i] = record.Law{Part: text, Name: text, Doc: text, Form: text, Source: text, Range: text}
	}
	for i := range r.Warnings {
		r.Warnings[i] = record.Warning{About: text, Words: text}
	}
	for i := range r.Inputs {
		r.Inputs[i] = record.Input{Key: text, Value: text, Doc: text, Origin: text, Source: text, Allowed: text, Outside: true}
	}
	for i := range r.Works {
		r.Works[i] = record.Work{Key: text, Text: text, BibTeX: text}
	}
	return r
}
