package emissivity

import "slices"

// WithKnownPoints returns the family with what is known of its emissivity at single
// wavelengths replaced by the points given.
func (f Family) WithKnownPoints(known ...Known) Family {
	f.known = nil
	for _, k := range known {
		f = f.KnownAt(k.Wavelength, k.Value, k.Std)
	}
	return f
}

// WithKnownPoints returns the process with what is known of its emissivity at single
// wavelengths replaced by the points given.
func (p Process) WithKnownPoints(known ...Known) Process {
	p.known = nil
	for _, k := range known {
		p = p.KnownAt(k.Wavelength, k.Value, k.Std)
	}
	return p
}

// IsMixed reports whether the process is a mixture over levels, so that it leaves open what
// kind of surface there is.
func (p Process) IsMixed() bool {
	return slices.ContainsFunc(p.components, func(c Component) bool { return c.Level != p.components[0].Level })
}
