package simulate_test

import (
	"encoding/json"
	"math"
	"strings"
	"testing"

	"difaudit/dif/simulate"
)

// With one slope and no guessing the planted D-DIF is -2.35 times the log odds ratio
// of reference over focal at every ability (Holland & Thayer 1988, from memory), and
// what Mantel-Haenszel finds in the population.
func TestPlantedDIFIsTheLogOddsRatio(t *testing.T) {
	t.Parallel()
	for _, model := range []simulate.Model{simulate.Rasch, simulate.TwoPL} {
		d := design(model, 10, 5, 8)
		for i := range d.Items {
			d.Items[i].DIF = []simulate.Shift{{Group: 1, Delta: float64(i)/2 - 2}}
		}
		for i, item := range simulation(t, d).Truth().Items {
			want := float64(i)/2 - 2
			r, f := item.Groups[0], item.Groups[1]
			for theta := -4.0; theta <= 4; theta += 0.25 {
				pr, pf := r.Correct(theta), f.Correct(theta)
				if got := -2.35 * math.Log(pr*(1-pf)/(pf*(1-pr))); !(math.Abs(got-want) <= 1e-9) {
					t.Errorf("%s, item %d at %v: %v, want %v", model, i+1, theta, got, want)
				}
			}
			if f.Delta != want || f.PopulationDelta == nil || !(math.Abs(*f.PopulationDelta-want) <= 1e-9) {
				t.Errorf("%s, item %d: planted %v, population %v, want %v", model, i+1, f.Delta, f.PopulationDelta, want)
			}
			if r.Delta != 0 || r.PopulationDelta == nil || *r.PopulationDelta != 0 {
				t.Errorf("%s, item %d: the reference group has D-DIF %v, %v", model, i+1, r.Delta, r.PopulationDelta)
			}
		}
	}
}

// CV-34 of the methods specification, by numerical integration outside this project:
// reference group N(0,1) with 70 in 100 candidates, focal group N(-0.5,1).
func TestPopulationDelta(t *testing.T) {
	t.Parallel()
	for _, tt := range []struct {
		model             simulate.Model
		aR, bR, aF, bF, c float64
		want              float64
	}{
		{simulate.TwoPL, 1.2, 0, 1.2, 0.5, 0, -1.410000},
		{simulate.TwoPL, 1.2, 0, 0.9, 0.5, 0, -0.932134},
		{simulate.ThreePL, 1.2, 1.5, 1.2, 2, 0.2, -0.501242},
		{simulate.ThreePL, 1.2, -1, 1.2, -0.5, 0.2, -1.147717},
	} {
		d := design(tt.model, 70, 30, 1)
		d.Items[0].Parameters = parameters(tt.aR, tt.bR, tt.c)
		d.Items[0].DIF = []simulate.Shift{{Group: 1, Delta: -2.35 * tt.aF * (tt.bF - tt.bR), Slope: tt.aF - tt.aR}}
		f := simulation(t, d).Truth().Items[0].Groups[1]
		if !(math.Abs(f.A-tt.aF) <= 1e-12) || !(math.Abs(f.B[0]-tt.bF) <= 1e-12) {
			t.Errorf("focal parameters %v, %v, want %v, %v", f.A, f.B[0], tt.aF, tt.bF)
		}
		if f.PopulationDelta == nil || !(math.Abs(*f.PopulationDelta-tt.want) <= 5e-7) {
			t.Errorf("%+v: population D-DIF %v", tt, f.PopulationDelta)
		}
	}
}

func TestPopulationDeltaNeedsCommonAbilities(t *testing.T) {
	t.Parallel()
	d := design(simulate.Rasch, 10, 10, 1)
	d.Items[0].DIF = []simulate.Shift{{Group: 1, Delta: -1}}
	d.Groups[1].SD = 0
	if f := simulation(t, d).Truth().Items[0].Groups[1]; f.PopulationDelta != nil {
		t.Errorf("fixed ability: population D-DIF %v, want none", *f.PopulationDelta)
	}
	d.Groups[0] = simulate.Group{Labels: []string{"reference"}, N: 10, Mean: 5, SD: 0.01}
	d.Groups[1] = simulate.Group{Labels: []string{"focal"}, N: 10, Mean: -5, SD: 0.01}
	if f := simulation(t, d).Truth().Items[0].Groups[1]; f.PopulationDelta != nil {
		t.Errorf("no common abilities: population D-DIF %v, want none", *f.PopulationDelta)
	}
}

// Each of several groups has its own planted DIF.
func TestSeveralGroups(t *testing.T) {
	t.Parallel()
	d := design(simulate.TwoPL, 10, 10, 2)
	d.Groupings = []string{"sex", "first_language"}
	d.Groups = []simulate.Group{
		{Labels: []string{"m", "test"}, N: 4, SD: 1},
		{Labels: []string{"f", "test"}, N: 3, SD: 1},
		{Labels: []string{"f", "other"}, N: 2, SD: 1},
		{Labels: []string{"", "other"}, N: 1, SD: 1},
	}
	d.Items[1].DIF = []simulate.Shift{{Group: 1, Delta: 1}, {Group: 2, Delta: -1.5, Slope: 0.2}}
	truth := simulation(t, d).Truth()
	for g, want := range []float64{0, 1, -1.5, 0} {
		p := truth.Items[1].Groups[g]
		if p.Delta != want || !(math.Abs(-2.35*p.A*(p.B[0]-truth.Items[1].Groups[0].B[0])-want) <= 1e-12) {
			t.Errorf("group %d: %+v, want D-DIF %v", g, p, want)
		}
	}
	if sd := truth.Groups[3].SampleSD; sd != nil {
		t.Errorf("one candidate has a standard deviation of ability of %v", *sd)
	}
	b, err := json.Marshal(truth)
	if err != nil {
		t.Fatal(err)
	}
	if s := string(b); strings.Contains(s, "NaN") || strings.Contains(s, "-0,") || !strings.Contains(s, `"sample_sd":null`) {
		t.Errorf("truth in JSON: %s", s)
	}
}

// Drawn parameters have the moments stated for them: b N(0,1), ln a N(0, 0.25²),
// logit c around the logit of one over the number of options.
func TestDrawnParameters(t *testing.T) {
	t.Parallel()
	const n = 4_000
	d := design(simulate.ThreePL, 1, 1, n)
	d.Options = 4
	var b, bb, a, aa, c, cc float64
	keys := map[string]int{}
	for _, item := range simulation(t, d).Truth().Items {
		p := item.Groups[0]
		x, y, z := p.B[0], math.Log(p.A), math.Log(p.C/(1-p.C))
		b, bb, a, aa, c, cc = b+x, bb+x*x, a+y, aa+y*y, c+z, cc+z*z
		keys[*item.Key]++
	}
	check := func(what string, sum, squares, mean, sd float64) {
		m := sum / n
		s := math.Sqrt(squares/n - m*m)
		if !(math.Abs(m-mean) <= errorsAllowed*sd/math.Sqrt(n)) || !(math.Abs(s-sd) <= errorsAllowed*sd/math.Sqrt(2*n)) {
			t.Errorf("%s: mean %.4f, SD %.4f; want %.4f, %.4f", what, m, s, mean, sd)
		}
	}
	check("b", b, bb, 0, 1)
	check("ln a", a, aa, 0, 0.25)
	check("logit c", c, cc, math.Log(1.0/3), 0.25)
	for _, k := range []string{"A", "B", "C", "D"} {
		checkShare(t, "key "+k, keys[k], n, 0.25)
	}
}
