package simulate_test

import (
	"encoding/json"
	"math"
	"testing"

	"difaudit/dif/simulate"
)

// CV-03 of the methods specification, from numpy/scipy: a point of the 3PL with D = 1
// and with D = 1.702 taken into the slope.
func TestCorrect(t *testing.T) {
	t.Parallel()
	for _, tt := range []struct{ a, b, c, theta, want float64 }{
		{1.2, 0.5, 0.2, 1, 0.7165250450},
		{1.2 * 1.702, 0.5, 0.2, 1, 0.7881650232},
		{1, 0, 0, 0, 0.5}, // by definition
	} {
		p := simulate.Parameters{A: tt.a, B: simulate.Thresholds{tt.b}, C: tt.c}
		if got := p.Correct(tt.theta); !(math.Abs(got-tt.want) <= 5e-11) {
			t.Errorf("%+v at %v: %.10f, want %.10f", p, tt.theta, got, tt.want)
		}
	}
}

func TestThresholdsJSON(t *testing.T) {
	t.Parallel()
	for _, tt := range []struct {
		b    simulate.Thresholds
		want string
	}{{simulate.Thresholds{0.5}, "0.5"}, {simulate.Thresholds{-1, 0.25}, "[-1,0.25]"}} {
		got, err := json.Marshal(tt.b)
		if err != nil || string(got) != tt.want {
			t.Errorf("%v: %s, %v; want %s", tt.b, got, err, tt.want)
		}
	}
}
