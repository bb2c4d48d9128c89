package pyro

import (
	"errors"
	"fmt"
	"math"
)

// Band is a spectral responsivity, compiled once into quadrature nodes. It is
// immutable and safe for concurrent use. Make one with Line, FlatTop, Gaussian
// or Tabulated.
//
// What a band sees of a blackbody is its mean spectral radiance,
//
//	S(T) = ∫ R(λ) L(λ,T) dλ / ∫ R(λ) dλ      W m⁻² sr⁻¹ m⁻¹
//
// so that a line and a narrow band read in the same unit. R is per watt.
type Band struct {
	nodes   []float64 // wavelengths, m, rising
	weights []float64 // of the mean, sum 1
	last    float64   // responsivity at the last tabulated point over ∫R dλ, 1/m; 0 where R is known to end
	edge    float64   // where that point lies, m
}

// BandRange is where the quadrature of a Band is right to 1e-10, relative.
const (
	BandMin = 200 * Kelvin
	BandMax = 6000 * Kelvin
)

// ErrBand is what every error of a band's description wraps.
var ErrBand = errors.New("pyro: band")

// Line returns the band of one wavelength.
func Line(λ Wavelength) (*Band, error) {
	if err := checkWavelength(λ); err != nil {
		return nil, err
	}
	return &Band{nodes: []float64{float64(λ)}, weights: []float64{1}}, nil
}

// FlatTop returns the band of equal responsivity from lo to hi and none outside.
func FlatTop(lo, hi Wavelength) (*Band, error) {
	if err := errors.Join(checkWavelength(lo), checkWavelength(hi)); err != nil {
		return nil, err
	}
	if lo >= hi {
		return nil, fmt.Errorf("%w: edges %v and %v: the first must be the shorter", ErrBand, lo, hi)
	}
	b := &Band{}
	b.addPanels(float64(lo), float64(hi), func(float64) float64 { return 1 })
	b.normalise()
	return b, nil
}

// Gaussian returns the band exp(−½((λ−centre)/s)²), s = fwhm/(2√(2 ln 2)), that ends
// cutoff away from its centre on both sides. The cut-off is part of the type: in the
// Wien region the far wing of an endless Gaussian would carry most of the signal.
func Gaussian(centre, fwhm, cutoff Wavelength) (*Band, error) {
	if err := checkWavelength(centre); err != nil {
		return nil, err
	}
	if !(fwhm > 0) || !(cutoff > 0) || math.IsInf(float64(fwhm), 0) || cutoff >= centre {
		return nil, fmt.Errorf("%w: Gaussian of width %v cut off at ±%v around %v: both must be positive, the cut-off shorter than the centre", ErrBand, fwhm, cutoff, centre)
	}
	s := float64(fwhm) / (2 * math.Sqrt(2*math.Ln2))
	c, reach := float64(centre), float64(cutoff)
	panels := int(math.Ceil(2 * reach / s))
	if panels > maxPanels {
		return nil, fmt.Errorf("%w: cut-off ±%v is more than %d standard deviations wide", ErrBand, cutoff, maxPanels/2)
	}
	b := &Band{}
	for i := range panels {
		from := c - reach + 2*reach*float64(i)/float64(panels)
		to := c - reach + 2*reach*float64(i+1)/float64(panels)
		b.addPanels(from, to, func(λ float64) float64 {
			z := (λ - c) / s
			return math.Exp(-z * z / 2)
		})
	}
	b.normalise()
	return b, nil
}

// Response says what a tabulated responsivity is counted in.
type Response int

const (
	PerWatt   Response = iota // signal per unit of radiant power
	PerPhoton                 // signal per photon: R ∝ λ times the table
)

// Tabulated returns a band from a table of responsivity in any unit, straight lines
// between the points. Wavelengths must rise, responsivities must not be negative. A
// last point above zero leaves open what lies beyond it: see Band.Check.
func Tabulated(λ []Wavelength, responsivity []float64, kind Response) (*Band, error) {
	if len(λ) < 2 || len(λ) != len(responsivity) {
		return nil, fmt.Errorf("%w: table of %d wavelengths and %d responsivities: two or more of each are needed", ErrBand, len(λ), len(responsivity))
	}
	for i := range λ {
		if err := checkWavelength(λ[i]); err != nil {
			return nil, fmt.Errorf("point %d: %w", i, err)
		}
		if i > 0 && λ[i] <= λ[i-1] {
			return nil, fmt.Errorf("%w: point %d: wavelength %v does not rise above %v", ErrBand, i, λ[i], λ[i-1])
		}
		if r := responsivity[i]; !(r >= 0) || math.IsInf(r, 0) {
			return nil, fmt.Errorf("%w: point %d: responsivity %g is not a number ≥ 0", ErrBand, i, r)
		}
	}
	factor := func(float64) float64 { return 1 }
	if kind == PerPhoton {
		factor = func(l float64) float64 { return l }
	}
	b := &Band{}
	for i := 1; i < len(λ); i++ {
		r0, r1 := responsivity[i-1], responsivity[i]
		if r0 == 0 && r1 == 0 {
			continue
		}
		from, to := float64(λ[i-1]), float64(λ[i])
		b.addPanels(from, to, func(l float64) float64 {
			return factor(l) * (r0*(to-l) + r1*(l-from)) / (to - from)
		})
	}
	n := len(λ) - 1
	b.edge = float64(λ[n])
	b.last = responsivity[n] * factor(b.edge)
	if len(b.nodes) == 0 {
		return nil, fmt.Errorf("%w: every tabulated responsivity is 0", ErrBand)
	}
	b.normalise()
	return b, nil
}

func checkWavelength(λ Wavelength) error {
	if !(λ >= 10*Nanometre && λ <= 1e6*Nanometre) {
		return fmt.Errorf("%w: wavelength %v is outside 0.01 to 1000 µm; is the unit right?", ErrBand, λ)
	}
	return nil
}

const (
	// panelExponent is how far c₂/λT may run over one eight-point panel at BandMin;
	// the remainder of the rule is then below 3e-13 of the integral.
	panelExponent = 4
	maxPanels     = 1000
)

// addPanels appends nodes for R over [from, to], where R is smooth.
func (b *Band) addPanels(from, to float64, r func(float64) float64) {
	// Equal steps in 1/λ, along which the exponent runs evenly.
	span := C2 / float64(BandMin) * (1/from - 1/to)
	panels := max(1, int(math.Ceil(span/panelExponent)))
	for i := range panels {
		p := 1 / (1/from + (1/to-1/from)*float64(i)/float64(panels))
		q := 1 / (1/from + (1/to-1/from)*float64(i+1)/float64(panels))
		mid, half := (p+q)/2, (q-p)/2
		for k := range 2 * len(gauss8Nodes) {
			node, weight := gauss8(k)
			λ := mid + half*node
			b.nodes = append(b.nodes, λ)
			b.weights = append(b.weights, half*weight*r(λ))
		}
	}
}

// normalise makes the weights those of a mean.
func (b *Band) normalise() {
	sum := 0.0
	for _, w := range b.weights {
		sum += w
	}
	for i := range b.weights {
		b.weights[i] /= sum
	}
	b.last /= sum
}

// Radiance returns the band's mean spectral radiance of a blackbody, S(T), in
// W m⁻² sr⁻¹ m⁻¹, to 1e-10 relative from 200 K to 6000 K.
func (b *Band) Radiance(t Temperature) float64 {
	sum := 0.0
	for i, λ := range b.nodes {
		sum += b.weights[i] * Radiance(Wavelength(λ), t)
	}
	return sum
}

// longest returns the longest wavelength of the quadrature, m.
func (b *Band) longest() float64 { return b.nodes[len(b.nodes)-1] }

// reducedRadiance returns S(T)·(λr⁵/c₁L)·exp(c₂v/λr) with v = 1/T and λr the longest
// wavelength: what is left of a band's radiance beside that of a line in Wien's limit.
func (b *Band) reducedRadiance(v float64) float64 {
	r := b.longest()
	sum := 0.0
	for i, λ := range b.nodes {
		q := r / λ
		q2 := q * q
		sum += b.weights[i] * q2 * q2 * q * math.Exp(-C2*v*(r-λ)/(r*λ)) / -math.Expm1(-C2*v/λ)
	}
	return sum
}

// RadianceSlope returns dS/dT in W m⁻² sr⁻¹ m⁻¹ K⁻¹.
func (b *Band) RadianceSlope(t Temperature) float64 {
	s, n := b.radianceAndLogSlope(t)
	if s == 0 {
		return 0
	}
	return s / float64(t) * n
}

// LogSlope returns d lnS/d lnT.
func (b *Band) LogSlope(t Temperature) float64 {
	_, n := b.radianceAndLogSlope(t)
	return n
}

// radianceAndLogSlope returns S(T) and d lnS/d lnT from one exponential a node.
func (b *Band) radianceAndLogSlope(t Temperature) (s, n float64) {
	sum := 0.0
	for i, λ := range b.nodes {
		l, n := radianceAndLogSlope(λ, float64(t))
		l *= b.weights[i]
		s += l
		sum += l * n
	}
	if s == 0 { // too cold for a float64; the longest wavelength has the last of it
		return 0, LogSlope(Wavelength(b.longest()), t)
	}
	return s, sum / s
}

// RadianceTemperature returns the temperature of the blackbody that gives the mean
// spectral radiance s: the inverse of Radiance. It returns 0 for s = 0, NaN for a
// negative s.
func (b *Band) RadianceTemperature(s float64) Temperature {
	t := RadianceTemperature(b.Mean(), s)
	if len(b.nodes) == 1 || !(t > 0) || math.IsInf(float64(t), 0) {
		return t
	}
	// Newton on ln S against 1/T, which is close to a straight line.
	for range 50 {
		radiance, n := b.radianceAndLogSlope(t) // n = d lnS/d lnT = −d lnS/d ln(1/T)
		step := math.Log(s/radiance) / n        // of ln T
		t = Temperature(float64(t) / (1 - math.Max(math.Min(step, 0.5), -1)))
		if math.Abs(step) < 1e-9 { // what is left is of the order of its square
			break
		}
	}
	return t
}

// Mean returns the responsivity-weighted mean wavelength.
func (b *Band) Mean() Wavelength {
	sum := 0.0
	for i, λ := range b.nodes {
		sum += b.weights[i] * λ
	}
	return Wavelength(sum)
}

// Edges returns the shortest and the longest quadrature node: the range over which
// an emissivity or a transmittance acts on the band.
func (b *Band) Edges() (lo, hi Wavelength) {
	return Wavelength(b.nodes[0]), Wavelength(b.nodes[len(b.nodes)-1])
}

// EffectiveWavelength returns the wavelength at which a line is as sensitive to
// temperature as the band is at t: ∂lnL/∂lnT there equals d lnS/d lnT (the limiting
// effective wavelength, with Planck's law in place of Wien's).
func (b *Band) EffectiveWavelength(t Temperature) Wavelength {
	if len(b.nodes) == 1 {
		return Wavelength(b.nodes[0])
	}
	n := b.LogSlope(t)
	x := n // x/(1 − e⁻ˣ) = n by Newton; its slope lies between ½ and 1
	for range 50 {
		e := math.Exp(-x)
		f := x/(1-e) - n
		step := f / ((1 - e - x*e) / ((1 - e) * (1 - e)))
		x -= step
		if math.Abs(step) < 1e-15*x {
			break
		}
	}
	return Wavelength(C2 / (x * float64(t)))
}

// EffectiveWavelengthBetween returns the mean effective wavelength between two
// temperatures: the one at which a line's radiances have the same ratio as the band's,
// L(λ,t1)/L(λ,t2) = S(t1)/S(t2), with Planck's law. For temperatures within 1e-6 of each
// other it is EffectiveWavelength, its limit. Relative error at most 1e-9.
func (b *Band) EffectiveWavelengthBetween(t1, t2 Temperature) Wavelength {
	v1, v2 := 1/float64(t1), 1/float64(t2)
	middle := b.EffectiveWavelength(Temperature(2 / (v1 + v2)))
	if len(b.nodes) == 1 || math.Abs(v2-v1) <= 1e-6*v1 {
		return middle
	}
	want := C2*(v2-v1)/b.longest() + math.Log(b.reducedRadiance(v1)/b.reducedRadiance(v2))
	// ln L₁/L₂ = κ(v₂ − v₁) + ln((1 − e^(−κv₂))/(1 − e^(−κv₁))) for κ = c₂/λ, by Newton.
	κ := C2 / float64(middle)
	for range 50 {
		e1, e2 := -math.Expm1(-κ*v1), -math.Expm1(-κ*v2)
		step := (κ*(v2-v1) + math.Log(e2/e1) - want) / (v2/e2 - v1/e1)
		κ -= step
		if math.Abs(step) <= 1e-15*κ {
			break
		}
	}
	return Wavelength(C2 / κ)
}

// Check refuses a temperature at which more than 1 % of the signal would come from
// beyond the last tabulated point if the responsivity stayed there at its last value:
// what blocks the radiation there is not in the table. A table that ends in 0 declares
// it blocked, and lines, flat tops and cut-off Gaussians end by definition.
func (b *Band) Check(t Temperature) error {
	if b.last == 0 {
		return nil
	}
	beyond := b.last * Exitance(t) / math.Pi * (1 - Fraction(Wavelength(b.edge), t))
	if share := beyond / (beyond + b.Radiance(t)); share > 0.01 {
		return fmt.Errorf("%w: at %v %.0f %% of the signal would come from beyond %v, the last tabulated point: tabulate the responsivity further, to where it is 0",
			ErrBand, t, 100*share, Wavelength(b.edge))
	}
	return nil
}

// Nodes returns the band's quadrature: wavelengths, rising, and weights of a mean that
// sum to 1, so that ∫R·f dλ/∫R dλ = Σ wₖ f(λₖ) for smooth f. The slices are copies.
func (b *Band) Nodes() (λ []Wavelength, weights []float64) {
	λ = make([]Wavelength, len(b.nodes))
	for i, v := range b.nodes {
		λ[i] = Wavelength(v)
	}
	return λ, append([]float64(nil), b.weights...)
}
