package simulate_test

import (
	"math"
	"strings"
	"testing"

	"difaudit/dif/simulate"
)

func TestFaultsOfADesign(t *testing.T) {
	t.Parallel()
	for _, tt := range []struct {
		change func(*simulate.Design)
		want   string
	}{
		{func(d *simulate.Design) { d.Model = "grm" }, `model "grm": use rasch, 2pl or 3pl`},
		{func(d *simulate.Design) { d.Options = 1 }, "1 options: give 2 to 26"},
		{func(d *simulate.Design) { d.OmittedShare = math.NaN() }, "omitted share NaN: give a share"},
		{func(d *simulate.Design) { d.OmittedShare = 0.9 }, "only wrong answers are omitted, and they allow at most 0."},
		{func(d *simulate.Design) { d.NotReachedShare = 0.3 }, "not reached share 0.3: give a share from 0 to 0.25"},
		{func(d *simulate.Design) { d.NotReachedShare, d.Items = 0.1, d.Items[:1] }, "need at least two items"},
		{func(d *simulate.Design) { d.ExternalCorrelation = 1.1 }, "external correlation 1.1"},
		{func(d *simulate.Design) { d.Groupings = nil }, "no grouping is named"},
		{func(d *simulate.Design) { d.Groupings[0] = "form" }, `grouping "form" is the name of another column`},
		{func(d *simulate.Design) { d.Groupings[0] = "a+b" }, `grouping "a+b" has one of the characters`},
		{func(d *simulate.Design) { d.Groups = d.Groups[:1] }, "1 groups: give a reference group and at least one focal group"},
		{func(d *simulate.Design) { d.Groups[1].Labels = nil }, "group 2 has 0 labels for 1 groupings"},
		{func(d *simulate.Design) { d.Groups[1].Labels = []string{"reference"} }, "group 2 has the labels of an earlier group"},
		{func(d *simulate.Design) { d.Groups[1].Labels = []string{"a\nb"} }, "cannot be printed"},
		{func(d *simulate.Design) { d.Groups[1].Labels = []string{" b"} }, "begins or ends with a space"},
		{func(d *simulate.Design) { d.Groups[1].N = 0 }, "group 2 has 0 candidates"},
		{func(d *simulate.Design) { d.Groups[1].Mean = math.Inf(1) }, "mean ability of +Inf"},
		{func(d *simulate.Design) { d.Groups[1].SD = -1 }, "standard deviation of ability of -1"},
		{func(d *simulate.Design) { d.Items = nil }, "0 items: give 1 to 10000"},
		{func(d *simulate.Design) { d.Items[1].ID = "Q001" }, `item 2: identifier "Q001" is used by an earlier item`},
		{func(d *simulate.Design) { d.Items[1].ID = "group" }, `item 2: identifier "group" is the name of another column`},
		{func(d *simulate.Design) { d.Items[1].Role = "scored" }, `item 2: role "scored": use operational`},
		{func(d *simulate.Design) { d.Items[1].MaxScore = 3 }, "item 2: maximum score 3"},
		{func(d *simulate.Design) { d.Items[1].Key = "A" }, `item 2: key "A" is none of its 0 options`},
		{func(d *simulate.Design) { d.Items[1].Parameters = parameters(0, 0, 0) }, "item 2: slope 0: give one above 0"},
		{func(d *simulate.Design) { d.Items[1].Parameters = parameters(1, math.NaN(), 0) }, "item 2: difficulty NaN"},
		{func(d *simulate.Design) { d.Items[1].Parameters = parameters(1, 0, 0.2) }, "item 2: lower asymptote 0.2: give 0, or use the model 3pl"},
		{func(d *simulate.Design) { d.Items[1].Parameters = &simulate.Parameters{A: 1} }, "item 2: 0 difficulties: give one"},
		{func(d *simulate.Design) { d.Model, d.Items[1].Parameters = simulate.Rasch, parameters(2, 0, 0) }, "item 2: slope 2 where others have 1"},
		{func(d *simulate.Design) { d.Items[1].DIF = []simulate.Shift{{Delta: 1}} }, "item 2: DIF is planted for group 0: name a focal group, 1 to 1"},
		{func(d *simulate.Design) { d.Items[1].DIF = []simulate.Shift{{Group: 1}, {Group: 1}} }, "item 2: DIF is planted twice"},
		{func(d *simulate.Design) { d.Items[1].DIF = []simulate.Shift{{Group: 1, Delta: math.NaN()}} }, "item 2: planted D-DIF NaN"},
		{func(d *simulate.Design) { d.Items[1].DIF = []simulate.Shift{{Group: 1, Slope: -5}} }, "item 2: its slope is"},
		{func(d *simulate.Design) {
			d.Model, d.Items[1].DIF = simulate.Rasch, []simulate.Shift{{Group: 1, Slope: 1}}
		}, "item 2: a slope shift is planted"},
	} {
		d := design(simulate.TwoPL, 10, 10, 4)
		tt.change(&d)
		_, err := simulate.New(d)
		if err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("error %v, want %q", err, tt.want)
		}
	}
}

func TestAllFaultsAtOnce(t *testing.T) {
	t.Parallel()
	d := design("4pl", 0, 10, 0)
	err := d.Validate()
	for _, want := range []string{"4pl", "0 candidates", "0 items"} {
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("error %v, want %q in it", err, want)
		}
	}
}

func TestDesignIsNotChanged(t *testing.T) {
	t.Parallel()
	d := design(simulate.Rasch, 5, 5, 0)
	d.Items = make([]simulate.Item, 3)
	s := simulation(t, d)
	if d.Items[0].ID != "" || s.Design().Items[2].ID != "Q003" || s.Design().Items[2].Role != "operational" {
		t.Errorf("given %+v, made %+v", d.Items, s.Design().Items)
	}
	before := digest(s)
	d.Groups[0].N, d.Groups[0].Mean = 1, 3
	if digest(s) != before {
		t.Error("a later change of the given design changes the simulation")
	}
}
