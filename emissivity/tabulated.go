package emissivity

import (
	"fmt"
	"math"
	"slices"

	"candent/pyro"
)

// Tabulated is a table over wavelength and temperature, times one scale:
//
//	ε = scale·(table at λ and T)
//
// bilinear within each cell. The derivative by T is therefore constant along T within a cell;
// on a tabulated temperature it is the one of the cell above, on the highest that of the
// cell below. Outside the table ε is NaN: what isn't known is not made up. Make one with
// NewTabulated.
//
// Parameter: scale, 1 ± std.
type Tabulated struct {
	λ      []pyro.Wavelength
	t      []pyro.Temperature
	values []float64 // [λ][T]
	prior  Prior
	hi     float64
}

// NewTabulated returns the surface with emissivity ε[i][j] at λ[i] and t[j]. It takes
// two wavelengths and two temperatures or more, both rising, and keeps copies; a curve
// that is known at one temperature only is a Given. std is the relative standard uncertainty
// of the whole table's level, 0 for a scale of exactly 1.
func NewTabulated(λ []pyro.Wavelength, t []pyro.Temperature, ε [][]float64, std float64) (Tabulated, error) {
	fail := func(format string, args ...any) (Tabulated, error) {
		return Tabulated{}, fmt.Errorf("%w: table: "+format, append([]any{ErrModel}, args...)...)
	}
	if len(λ) < 2 || len(t) < 2 || len(ε) != len(λ) {
		return fail("%d wavelengths, %d temperatures, %d rows: two or more of each are needed, and a row for each wavelength", len(λ), len(t), len(ε))
	}
	if !(std >= 0) || math.IsInf(std, 0) {
		return fail("relative standard uncertainty %g of the level", std)
	}
	for i, v := range λ {
		if !(v > 0) || math.IsInf(float64(v), 0) || i > 0 && v <= λ[i-1] {
			return fail("wavelength %d, %v: wavelengths must be positive and rise", i, v)
		}
	}
	for j, v := range t {
		if !(v > 0) || math.IsInf(float64(v), 0) || j > 0 && v <= t[j-1] {
			return fail("temperature %d, %v: temperatures must be positive and rise", j, v)
		}
	}
	table := Tabulated{λ: slices.Clone(λ), t: slices.Clone(t), prior: Prior{Value: 1, Std: std, Set: true}}
	for i, row := range ε {
		if len(row) != len(t) {
			return fail("row %d, %v: %d values for %d temperatures", i, λ[i], len(row), len(t))
		}
		for j, v := range row {
			if !(v > 0 && v <= 1) {
				return fail("row %d, %v, at %v: emissivity %g must lie above 0 and not above 1", i, λ[i], t[j], v)
			}
		}
		table.values = append(table.values, row...)
	}
	table.hi = 1 / slices.Min(table.values)
	return table, nil
}

// String implements Surface.
func (Tabulated) String() string { return "tabulated emissivity" }

// Err implements Surface.
func (b Tabulated) Err() error {
	if b.values == nil {
		return fmt.Errorf("%w: empty table: make it with NewTabulated", ErrModel)
	}
	return nil
}

// Range returns the first and the last wavelength and temperature of the table.
func (b Tabulated) Range() (λLo, λHi pyro.Wavelength, tLo, tHi pyro.Temperature) {
	if b.values == nil {
		return
	}
	return b.λ[0], b.λ[len(b.λ)-1], b.t[0], b.t[len(b.t)-1]
}

// Parameters implements Model. Beyond the upper bound of the scale the whole table would
// exceed 1; the lower is a tenth.
func (b Tabulated) Parameters() []Parameter {
	return []Parameter{{Name: "scale", Lo: 0.1, Hi: max(b.hi, 1), Start: 1, Prior: b.prior}}
}

// Emissivity implements Model.
func (b Tabulated) Emissivity(grad, θ []float64, λ pyro.Wavelength, t pyro.Temperature) (ε, dT float64) {
	checkLengths(grad, θ, 1)
	i, x := cell(b.λ, λ)
	j, y := cell(b.t, t)
	n := len(b.t)
	if i < 0 || j < 0 {
		if grad != nil {
			grad[0] = math.NaN()
		}
		return math.NaN(), math.NaN()
	}
	lower := (1-x)*b.values[i*n+j] + x*b.values[(i+1)*n+j]
	upper := (1-x)*b.values[i*n+j+1] + x*b.values[(i+1)*n+j+1]
	ε = (1-y)*lower + y*upper
	if grad != nil {
		grad[0] = ε
	}
	return θ[0] * ε, θ[0] * (upper - lower) / float64(b.t[j+1]-b.t[j])
}

// cell returns the cell of the rising axis that v lies in, and where in it from 0 to 1;
// i < 0 where v is NaN or outside. On a grid point it is the cell above.
func cell[V pyro.Wavelength | pyro.Temperature](axis []V, v V) (i int, x float64) {
	last := len(axis) - 1
	if last < 1 || !(v >= axis[0] && v <= axis[last]) {
		return -1, 0
	}
	i, found := slices.BinarySearch(axis, v)
	if !found {
		i--
	}
	i = min(i, last-1)
	return i, float64((v - axis[i]) / (axis[i+1] - axis[i]))
}
