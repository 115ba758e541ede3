package weathering_test

import (
	"fmt"
	"math"

	"cycle/carbon/weathering"
)

// Walker, Hays & Kasting (1981): 13.7 K of warming multiply weathering by e.
func ExampleLaw() {
	law := weathering.Land[0].New()
	ref := weathering.Reference{T: 288, P: 280e-6, Sun: 340, Alb: 0.3, Flux: 6e12, Land: 1.5e14}
	if err := law.Bind(ref); err != nil {
		fmt.Println(err)
		return
	}
	e := &weathering.Env{T: 288 + 13.7, P: 280e-6}
	fmt.Printf("%.4f\n", law.Relative(e))
	e.P *= 2
	e.LnP = math.Ln2
	fmt.Printf("%.4f with twice the CO2\n", law.Relative(e))
	// Output:
	// 2.7183
	// 3.3466 with twice the CO2
}
