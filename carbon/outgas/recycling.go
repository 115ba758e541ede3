package outgas

import (
	"fmt"

	"cycle/carbon/cite"
	"cycle/carbon/units"
)

// turnover moves the carbonate reservoirs in proportion to crust production s:
//
//	subducted   = s·C_seafloor/τ
//	metamorphic = s·C_continental·(F_meta,₀/C_cont,₀)
type turnover struct {
	Tau  float64 // τ, mean age of the seafloor at subduction at the reference state, yr
	meta float64 // F_meta,₀/C_cont,₀, 1/yr
}

func newTurnover() turnover { return turnover{Tau: 105 * units.Myr} }

func (l *turnover) fields() []units.Field {
	return []units.Field{
		{Key: "subduction_time", Kind: units.Time, Unit: "Myr", Min: 1e6, Max: 2e9, Doc: "mean age of seafloor carbonate at subduction", Source: cite.Ref{Work: cite.Rowley2002, Note: "0.7 of the Earth's area over 3.4 km2/yr", Trust: cite.Derived}, Value: &l.Tau},
	}
}

func (l *turnover) bind(ref Reference) error {
	if d := ref.Deposited(); d < 0 || d > 1 {
		return fmt.Errorf("ridge + arc − seafloor weathering = %.3g Tmol/yr must lie between 0 and land weathering, %.3g Tmol/yr, for the carbonate reservoirs to be steady at the reference state", (ref.Ridge+ref.Arc-ref.Seafloor)/1e12, ref.Land/1e12)
	}
	if ref.Metamorphic < 0 {
		return fmt.Errorf("ridge + arc = %.3g Tmol/yr is more than all outgassing", (ref.Ridge+ref.Arc)/1e12)
	}
	l.meta = ref.Metamorphic / ref.Continental
	return nil
}

// Recycling scales each source with its reservoir and with crust production s:
//
//	ridge       = s·C_mantle·(F_ridge,₀/C_mantle,₀)·(A/M_mantle)/(A/M_mantle)_Earth
//	arc         = α·subducted,  α = F_arc,₀/(F_arc,₀ + F_ridge,₀)
//	metamorphic = s·C_continental·(F_meta,₀/C_cont,₀)
//
// With these α and deposition fractions all reservoirs are steady at the
// reference state. The structure is that of Sleep & Zahnle (2001) and Foley (2015).
type Recycling struct {
	turnover
	ridge float64 // F_ridge,₀/C_mantle,₀, 1/yr
	arc   float64 // α
}

func newRecycling() Law { return &Recycling{turnover: newTurnover()} }

// Fields lists the subduction time.
func (l *Recycling) Fields() []units.Field { return l.fields() }

// Bind fixes the rate constants at the reference state.
func (l *Recycling) Bind(ref Reference) error {
	l.ridge = ref.Ridge / ref.Mantle
	l.arc = 0
	if ref.Ridge+ref.Arc > 0 {
		l.arc = ref.Arc / (ref.Ridge + ref.Arc)
	}
	return l.bind(ref)
}

// Fluxes returns the fluxes.
func (l *Recycling) Fluxes(in *Input) Fluxes {
	s := in.Crust * in.Scale
	sub := s * in.Seafloor / l.Tau
	return Fluxes{
		Ridge:       s * in.Dilution * in.Mantle * l.ridge,
		Arc:         l.arc * sub,
		Metamorphic: s * in.Continental * l.meta,
		Subducted:   sub,
	}
}
