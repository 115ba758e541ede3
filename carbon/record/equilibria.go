package record

// Names of folds.
const (
	FoldCold = "cold fold"         // the warm climate ends here as carbon is lost
	FoldThaw = "deglaciation fold" // the frozen climate ends here as carbon gathers
	FoldHot  = "hot fold"          // the warm climate ends here as carbon gathers
)

// Steady is one steady state of climate and carbon under fixed sunlight.
type Steady struct {
	TemperatureK float64 `json:"temperature_k"`
	PCO2Bar      float64 `json:"pco2_bar"`
	Outgassing   float64 `json:"outgassing_tmol_yr"` // that keeps the state: land plus seafloor weathering
	Land         float64 `json:"land_weathering_tmol_yr"`
	Seafloor     float64 `json:"seafloor_weathering_tmol_yr"`
	SurfaceEmol  float64 `json:"surface_carbon_emol"`
	Ice          float64 `json:"ice_cover"`
	SupplyUse    float64 `json:"supply_use"`     // land weathering over its supply limit
	Sheet        int     `json:"sheet"`          // 0 where more CO2 warms, 1 where it cools
	Climate      bool    `json:"climate_stable"` // at fixed surface carbon
	Stable       bool    `json:"stable"`         // climate and carbon together, at fixed outgassing
	GrowthPerYr  float64 `json:"growth_per_yr"`  // of temperature at fixed surface carbon; negative is stable
	ResponseKyr  float64 `json:"response_time_kyr"`
}

// Fold is a state at which the climate must jump.
type Fold struct {
	Steady     `json:"state"`
	Name       string  `json:"name"`
	GrowthWm2K float64 `json:"growth_w_m2_k"` // what is left of the growth rate at the located fold
}

// CurvePoint is one point of the curve of steady states.
type CurvePoint struct {
	TemperatureK float64 `json:"temperature_k"`
	PCO2Bar      float64 `json:"pco2_bar"`
	Outgassing   float64 `json:"outgassing_tmol_yr"`
	Sheet        int     `json:"sheet"`
	Climate      bool    `json:"climate_stable"`
	Stable       bool    `json:"stable"`
}

// Boundaries are the limits that decide the fate of a planet that starts warm
// under fixed sunlight. Outgassing is in Tmol/yr; NaN means there is none.
type Boundaries struct {
	SunlightWm2    float64 `json:"sunlight_w_m2"`
	NoWarm         string  `json:"no_warm"`                      // empty, or why there is no warm climate: "hot" or "cold"
	WarmNeeds      float64 `json:"warm_state_needs_tmol_yr"`     // outgassing below which the warm state is lost
	WarmFold       Steady  `json:"cold_fold"`                    // where the warm branch ends
	ThawsAbove     float64 `json:"snowball_thaws_above_tmol_yr"` // outgassing above which no snowball lasts
	ThawFold       Steady  `json:"deglaciation_fold"`            // where the frozen branch ends
	ThawWhy        string  `json:"frozen_branch_ends_with"`      // "fold", "no jump", or an outcome
	HotAbove       float64 `json:"warm_state_bears_tmol_yr"`     // outgassing above which the warm state is too hot
	HotEnd         Steady  `json:"hot_end"`
	HotWhy         string  `json:"warm_branch_ends_with"` // the outcome beyond the hot end
	SupplyLimit    float64 `json:"supply_limit_tmol_yr"`
	CondensesAbove float64 `json:"condenses_above_tmol_yr"` // outgassing above which CO2 condenses before a thaw
	CondensesBelow float64 `json:"condenses_below_tmol_yr"` // outgassing below which a snowball cools until CO2 condenses
	RadiationLimit float64 `json:"radiation_limit_w_m2"`    // sunlight above which no warm climate sheds its heat
}

// Equilibria is the curve of steady states under fixed conditions.
type Equilibria struct {
	AgeGyr      float64      `json:"age_gyr"`
	SunlightWm2 float64      `json:"sunlight_w_m2"`
	Land        float64      `json:"land_relative"`
	Biology     float64      `json:"biology_relative"`
	Crust       float64      `json:"crust_relative"`
	Outgassing  float64      `json:"outgassing_tmol_yr"` // at which the states are
	Curve       []CurvePoint `json:"curve"`
	Folds       []Fold       `json:"folds"`
	States      []Steady     `json:"states"`
	Boundaries  Boundaries   `json:"boundaries"`
}

// Cycle is one turn of a limit cycle between snowball and warm.
type Cycle struct {
	PeriodMyr float64 `json:"period_myr"`
	FrozenMyr float64 `json:"frozen_myr"`
	WarmMyr   float64 `json:"warm_myr"`
	ColdestK  float64 `json:"coldest_k"`
	WarmestK  float64 `json:"warmest_k"`
	LeastBar  float64 `json:"least_co2_bar"`
	MostBar   float64 `json:"most_co2_bar"`
}
