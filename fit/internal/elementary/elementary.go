// Package elementary has exponentials and logarithms of whole slices, without calls in the
// loop: they are most of what a fit of many channels costs.
package elementary

import "math"

// ExpTo writes eˣ to dst for each x, to 2 ULP for |x| < 700; dst may be src. Beyond, it
// asks math.Exp. A loop without calls costs about half of one that calls math.Exp, and
// the exponentials are most of what a fit of many channels costs (BenchmarkExp).
//
//	eˣ = 2^(k/64) · e^r,   k = round(64x/ln 2),   |r| ≤ ln 2/128
//
// with a table of 2^(j/64), and the polynomial of e^r to r⁵/5! (remainder below 4e-17).
func ExpTo(dst, src []float64) {
	const (
		perLn2 = expSteps / math.Ln2
		high   = 0x1.62e42fefa0000p-1 / expSteps // ln 2 in two parts, the first exact in k·high
		low    = 0x1.cf79abc9e3b3ap-40 / expSteps
		shift  = 0x1.8p52
	)
	dst = dst[:len(src)]
	for i, x := range src {
		if !(math.Abs(x) < 700) {
			dst[i] = math.Exp(x)
			continue
		}
		f := (x*perLn2 + shift) - shift // rounds to the nearest integer
		k := int64(f)
		r := (x - f*high) - f*low
		p := r * (1 + r*(1.0/2+r*(1.0/6+r*(1.0/24+r*(1.0/120)))))
		t := expTable[uint(k)%expSteps]
		dst[i] = (t + t*p) * math.Float64frombits(uint64(1023+k>>expBits)<<52)
	}
}

const (
	expBits  = 6
	expSteps = 1 << expBits
)

var expTable = func() (t [expSteps]float64) {
	for j := range t {
		t[j] = math.Exp2(float64(j) / expSteps)
	}
	return t
}()

// LogTo writes ln x to dst to 1e-10 for positive normal x, which is enough for a start;
// for others it writes what comes of their bits.
func LogTo(dst, src []float64) {
	const mask = 1<<52 - 1
	dst = dst[:len(src)]
	for i, x := range src {
		bits := math.Float64bits(x)
		j := bits >> (52 - expBits) % expSteps
		m := math.Float64frombits(bits&mask | 1023<<52)
		r := m*logInverse[j] - 1 // |r| < 1/128
		dst[i] = float64(int64(bits>>52)-1023)*math.Ln2 + logTable[j] + r*(1-r*(1.0/2-r*(1.0/3-r*(1.0/4-r*(1.0/5)))))
	}
}

// logTable holds the logarithms of the middles of expSteps parts of [1, 2).
var logTable, logInverse = func() (l, inv [expSteps]float64) {
	for j := range l {
		m := 1 + (float64(j)+0.5)/expSteps
		l[j], inv[j] = math.Log(m), 1/m
	}
	return l, inv
}()
