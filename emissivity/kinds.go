package emissivity

import "candent/pyro"

// Mark says what a kind's figures rest on.
type Mark int

const (
	// Sourced: levels and spreads computed from published values of several specimens.
	Sourced Mark = iota
	// Judged: some figures sourced, the rest judgement.
	Judged
	// Unvalidated: too few sources to test the kind on surfaces that it wasn't made from.
	Unvalidated
)

func (m Mark) String() string {
	return [...]string{"sourced", "partly judgement", "not validated: too few sources"}[m]
}

// Kind is a kind of surface with its process.
type Kind struct {
	Name    string // as a program's option would have it
	Process Process
	Mark    Mark
	Basis   string // what the figures rest on, in words
}

// Kinds returns the named kinds, in a fixed order.
//
// The sources, by the short names used in Basis:
//
//	B&W 1915      G. K. Burgess, R. G. Waltenberg, The emissivity of metals and oxides II,
//	              Bull. Bur. Stand. 11 (1915) 591, Tables 1–7, at 0.65 µm
//	constants     ε = 4n/((n+1)²+k²) from published n and k of several authors for each
//	              metal at room temperature: mean and standard deviation over authors
//	graphites     the same of seven graphites, M. R. Querry, CRDC-CR-85034 (1985)
//	TPRC          Y. S. Touloukian, D. P. DeWitt and others, Thermophysical Properties of
//	              Matter 7 (1970) and 8 (1972), chromium and chromium oxide
func Kinds() []Kind {
	return []Kind{
		{"metal", BareTransitionMetal(), Sourced, "level from B&W 1915 (13 metals at 0.65 µm, mean 0.36, standard deviation of ln ε 0.14, widened to 0.2), slope −0.57 ± 0.38 from constants of 11 metals, 0.65 to 1.6 µm; the smooth term (0.2) is judgement"},
		{"bright", BrightMetal(), Sourced, "level and spread from constants of Al, Cu, Ag and Au at 1.0 µm (0.024, standard deviation of ln ε 0.70), raised by 1.5 for the factor 1 to 2.4 between films and bulk specimens and by 2 from room temperature to 600 to 1300 K, over which the resistivity of these metals grows two- to fivefold (from memory) and the part of the emissivity that follows it with it; slope −1.1 ± 0.3 from 0.65 to 2.2 µm, widened for the interband edge; the other terms are judgement"},
		{"growing-oxide", GrowingOxide(), Unvalidated, "spread 0.7 of the level while the film is thin: TPRC chromium strip 0.055 → 0.48; that fringes correlate over a few tenths in ln λ is judgement"},
		{"dark-scale", DarkScale(), Judged, "0.82 with 0.10 to 0.12 from B&W 1915 (Fe₃O₄, NiO, Cr₂O₃, melted, 0.53 to 0.89) and TPRC Cr₂O₃ (0.67 to 0.96); the melted ones lie at its lower edge"},
		{"white-ceramic", WhiteCeramic(), Unvalidated, "spread 0.45 from a factor of two between grades; level from Al₂O₃ 0.40 and ZrO₂ 0.29 at their melting points (Dubrovinsky & Saxena 1999) and lime 0.35 to 0.70; often semi-transparent"},
		{"iron-bearing-ceramic", IronBearingCeramic(), Unvalidated, "spread 0.2 and level 0.75 are judgement"},
		{"carbon", Carbon(), Judged, "level, slope and spread from seven graphites of one report, 0.65 to 5 µm, the spread widened to 0.13 for machined or oxidised surfaces"},
		{"liquid-metal", LiquidMetal(), Judged, "level 0.37 from B&W 1915 (eight liquid steels, Fe, Ni, Co, Pd); spread 0.25 for patches of oxide and slag, and the slope of solid metals, are judgement"},
	}
}

// BareTransitionMetal is clean Fe, Ni, Co, Cr, Mo, W, Pt, Pd, Ir, Rh, V, Nb or Zr, solid. B&W
// 1915 give 0.29 to 0.49 for them at 0.65 µm, and 0.63 for Ti, which this kind does not claim.
// Beyond 2 µm the slope steepens to −1 and more: there it is not validated.
func BareTransitionMetal() Process {
	return NewProcess("bare transition metal", overLengths(Component{Level: 0.36, Centre: 0.65 * pyro.Micrometre,
		Slope: -0.55, SlopeSpread: 0.4, Spread: 0.2, Smooth: Term{Std: 0.2}, Roughness: channelRoughness})...)
}

// BrightMetal is clean Cu, Ag, Au or Al. At 1.0 µm constants give 0.028, 0.011, 0.019 and 0.058,
// bulk specimens up to 2.4 times as much, and at the temperatures at which they are read, where
// their resistivity is two to five times that of room temperature, about twice as much again.
// Half of the weight allows for an interband edge within the channels (copper near 0.59 µm, gold
// near 0.5 µm, aluminium's bump near 0.8 µm; from memory), over which ε changes several-fold
// within a sixth of λ. The factor for temperature and the edge were added after a first study
// without them had held 83 %.
func BrightMetal() Process {
	c := Component{Level: 0.07, Centre: 1 * pyro.Micrometre,
		Slope: -1, SlopeSpread: 0.7, Spread: 0.6, Smooth: Term{Std: 0.5}, Rough: Term{0.15, 0.2}, Roughness: 0.02}
	edge := c
	edge.Rough = Term{0.6, 0.15}
	return NewProcess("bright non-ferrous metal", append(overLengths(c), overLengths(edge)...)...)
}

// GrowingOxide is a metal whose oxide film is 0.1 to 5 µm thick and interferes. Half of the
// weight allows for a film that hardly absorbs: between the extremes of its fringes ε then
// swings two- to threefold, a standard deviation of ln ε of 0.3 (Airy's formula; added after a
// first study without it had held 82 % of the computed films).
func GrowingOxide() Process {
	c := Component{Level: 0.5, Spread: 0.4, Smooth: Term{Std: 0.4}, Rough: Term{filmStd, filmLength}, Roughness: channelRoughness}
	clear := c
	clear.Rough = Term{2 * filmStd, filmLength}
	return NewProcess("metal under a growing oxide film", append(overLengths(c), overLengths(clear)...)...)
}

// DarkScale is a metal under an oxide too thick and too rough to interfere.
func DarkScale() Process {
	return NewProcess("dark oxide scale", overLengths(Component{Level: 0.82,
		Spread: 0.10, Smooth: Term{Std: 0.07}, Roughness: channelRoughness})...)
}

// WhiteCeramic is alumina, magnesia, zirconia, lime. Mind that it may be semi-transparent.
func WhiteCeramic() Process {
	return NewProcess("white ceramic", overLengths(Component{Level: 0.38, Smooth: Term{Std: 0.45}, Roughness: channelRoughness})...)
}

// IronBearingCeramic is fired clay, brick, slag-coated refractory.
func IronBearingCeramic() Process {
	return NewProcess("iron-bearing ceramic", overLengths(Component{Level: 0.75, Smooth: Term{Std: 0.2}, Roughness: channelRoughness})...)
}

// Carbon is graphite, machined or oxidised. Seven polished ones give 0.773 ± 0.030 at 0.9 µm,
// 0.657 ± 0.027 at 1.6 and 0.464 ± 0.019 at 5 µm, slopes of −0.25 to −0.30; rough and porous
// carbon is flatter and higher.
func Carbon() Process {
	return NewProcess("carbon", overLengths(Component{Level: 0.78, Centre: 0.9 * pyro.Micrometre,
		Slope: -0.2, SlopeSpread: 0.15, Spread: 0.12, Smooth: Term{Std: 0.05}, Roughness: channelRoughness})...)
}

// LiquidMetal is liquid iron, steel, nickel, cobalt, with patches of oxide or slag.
func LiquidMetal() Process {
	return NewProcess("liquid metal", overLengths(Component{Level: 0.37, Centre: 0.65 * pyro.Micrometre,
		Slope: -0.5, SlopeSpread: 0.3, Spread: 0.2, Smooth: Term{Std: 0.15}, Roughness: channelRoughness})...)
}

// AnySurface is a mixture of Unknown and of the kinds for those who don't know which they
// have: Unknown has half of the weight, the kinds share the other half equally (judgement).
// Bright metals are in it without their interband edges: an edge and the fringe of an oxide
// film look alike in a spectrum, and films are the more frequent.
// The readings weigh them.
func AnySurface() Process {
	kinds := Kinds()
	list := Unknown().components
	for i := range list {
		list[i].Weight /= 2
	}
	for _, k := range kinds {
		members := k.Process.components
		if k.Name == "bright" { // without its edge, which could pass for an oxide's fringe
			members = members[:len(smoothLengths)]
		}
		for _, c := range members {
			c.Weight *= float64(len(k.Process.components)) / float64(len(members)*2*len(kinds))
			list = append(list, c)
		}
	}
	p := NewProcess("any surface", list...)
	p.wide = true
	return p
}

// overLengths returns the component at each smooth length, in equal shares.
func overLengths(c Component) []Component {
	c.Weight = 1
	list := make([]Component, len(smoothLengths))
	for i, length := range smoothLengths {
		list[i] = c
		list[i].Smooth.Length = length
	}
	return list
}
