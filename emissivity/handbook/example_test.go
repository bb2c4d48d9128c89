package handbook_test

import (
	"fmt"
	"strings"

	"candent/emissivity"
	"candent/emissivity/handbook"
	"candent/pyro"
)

func Example() {
	entries, err := handbook.SpectralOf("nickel oxide")
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, s := range entries {
		k, err := s.Known(650 * pyro.Nanometre)
		if err != nil {
			fmt.Println(err)
			continue
		}
		fmt.Printf("%v: %.2f ± %.2f, %v\n", s, k.Value, k.Std, s.Mark)
	}
	// Output:
	// nickel oxide, smooth (melted), 1273 K: 0.89 ± 0.09, data
	// nickel oxide, smooth (melted), 1473 K: 0.83 ± 0.08, data
	// nickel oxide, smooth (melted), 1723 K: 0.69 ± 0.07, data
	// nickel oxide, liquid, 1823 K: 0.68 ± 0.07, data
	// nickel oxide, matte sheet, 1273 K: 0.91 ± 0.09, data
	// nickel oxide, any, temperature not stated: 0.90 ± 0.23, from memory
}

func ExampleSpectralOf() {
	_, err := handbook.SpectralOf("tungsen")
	fmt.Println(err)
	_, err = handbook.SpectralOf("alumina brick")
	fmt.Println(err)
	// Output:
	// handbook: no spectral emissivity of "tungsen"; names like it: tungsten
	// handbook: no spectral emissivity of "alumina brick": only total ones are known, see TotalOf; they are not those of a band; names like it: alumina
}

func ExampleTotal_AssumeGrey() {
	w, err := handbook.TotalOf("tungsten")
	if err != nil {
		fmt.Println(err)
		return
	}
	_, note, err := w[0].AssumeGrey(650*pyro.Nanometre, 2000*pyro.Kelvin)
	fmt.Println(note, err)
	// Output: the emissivity at 0.65 µm is not known: the total emissivity of tungsten, clean at 2000 K (direction not stated, data) stands for it as if the surface were grey, which it is not; 0.26 ± 0.19 <nil>
}

func ExampleJoin() {
	entries, err := handbook.SpectralOf("tungsten")
	if err != nil {
		fmt.Println(err)
		return
	}
	var ribbon []handbook.Spectral
	for _, s := range entries {
		if strings.HasPrefix(s.State, "ribbon, annealed") {
			ribbon = append(ribbon, s)
		}
	}
	table, err := handbook.Join(ribbon...)
	if err != nil {
		fmt.Println(err)
		return
	}
	var surface emissivity.Model = table
	ε, dT := surface.Emissivity(nil, []float64{1}, 900*pyro.Nanometre, 2600*pyro.Kelvin)
	fmt.Printf("%v: %.4f, %.2g per K\n", surface, ε, dT)
	// Output: tabulated emissivity: 0.3880, -2.5e-05 per K
}
