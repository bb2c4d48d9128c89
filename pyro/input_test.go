package pyro_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/pyro"
)

func TestInputCheck(t *testing.T) {
	for _, good := range []pyro.Input{
		{Name: "window", Unit: "1", Value: 0.92}, {Name: "walls", Unit: "K", Value: 1473, Std: 10, PerReading: true},
		{Name: "gain", Value: 1, Std: math.Inf(1)},
	} {
		if err := good.Check(); err != nil {
			t.Errorf("%+v: %v", good, err)
		}
	}
	for _, bad := range []*pyro.Input{
		nil, {Value: 1}, {Name: "a", Value: math.NaN()}, {Name: "a", Value: math.Inf(1)}, {Name: "a", Std: -1}, {Name: "a", Std: math.NaN()},
	} {
		if err := bad.Check(); !errors.Is(err, pyro.ErrInput) {
			t.Errorf("%+v: error %v", bad, err)
		}
	}
}

func ExampleInput_Check() {
	walls := pyro.Input{Name: "walls", Unit: "K", Value: 1473, Std: -10}
	fmt.Println(walls.Check())
	// Output:
	// pyro: input "walls": standard uncertainty -10 must be 0 (fixed), positive, or +Inf (free)
}
