package simulate

import "math"

// TruthSchema names the form of the JSON document that a Truth is written as.
const TruthSchema = "difaudit/simulation/1"

// Truth tells what a simulation was made from. The names in its JSON form are those
// of the field tags.
type Truth struct {
	Schema              string       `json:"schema"` // TruthSchema
	Model               Model        `json:"model"`
	Seed                int64        `json:"seed"`
	Options             int          `json:"options"`              // of each item; 0: answers are scores
	OmittedShare        float64      `json:"omitted_share"`        // expected, of the answers reached
	NotReachedShare     float64      `json:"not_reached_share"`    // expected, of all answers
	ExternalCorrelation float64      `json:"external_correlation"` // with ability; 0: no external score
	Groupings           []string     `json:"groupings"`
	Groups              []TruthGroup `json:"groups"` // the reference group first
	Items               []TruthItem  `json:"items"`
}

// TruthGroup describes a group: the distribution its abilities were drawn from, and
// the abilities that were drawn.
type TruthGroup struct {
	Labels     []string `json:"labels"` // one for each grouping
	N          int      `json:"n"`
	Mean       float64  `json:"ability_mean"`
	SD         float64  `json:"ability_sd"`
	SampleMean float64  `json:"sample_mean"`
	SampleSD   *float64 `json:"sample_sd"` // with n - 1; nil for one candidate
}

// TruthItem describes an item.
type TruthItem struct {
	ID       string    `json:"item"`
	Role     string    `json:"role"`
	MaxScore int       `json:"max_score"`
	Key      *string   `json:"key"`           // nil for scored answers
	Shares   []float64 `json:"wrong_choices"` // of each option among wrong answers, 0 for the key; nil for scored answers

	Groups []TruthParameters `json:"groups"` // as Truth.Groups
}

// TruthParameters are the parameters of an item in one group, on the metric of the
// abilities and with D = 1.
type TruthParameters struct {
	Parameters
	Delta float64 `json:"planted_d_dif"`       // Shift.Delta; negative: harder for this group; 0 for the reference group
	Slope float64 `json:"planted_slope_shift"` // Shift.Slope

	// PopulationDelta is the D-DIF that the Mantel-Haenszel method has in the limit of
	// many candidates, matched on ability itself. It differs from the planted one where
	// slopes differ or answers are guessed. nil where ability is fixed in a group or the
	// groups have no ability in common.
	PopulationDelta *float64 `json:"population_d_dif"`
}

// Truth returns what the simulation is made from. It draws all abilities to describe
// them.
func (s *Simulation) Truth() Truth {
	d := &s.design
	t := Truth{
		Schema: TruthSchema, Model: d.Model, Seed: d.Seed, Options: d.Options,
		OmittedShare: d.OmittedShare, NotReachedShare: d.NotReachedShare, ExternalCorrelation: d.ExternalCorrelation,
		Groupings: d.Groupings,
	}
	for g, group := range d.Groups {
		mean, sd := s.sampleAbility(g)
		t.Groups = append(t.Groups, TruthGroup{
			Labels: group.Labels, N: group.N, Mean: group.Mean, SD: group.SD, SampleMean: mean, SampleSD: sd,
		})
	}
	labels := optionLabels(d.Options)
	for i, item := range d.Items {
		ti := TruthItem{ID: item.ID, Role: item.Role, MaxScore: item.MaxScore}
		if s.choices != nil {
			ti.Key = &labels[s.choices[i].key]
			ti.Shares = s.choices[i].shares
		}
		for g := range d.Groups {
			ti.Groups = append(ti.Groups, s.truthParameters(i, g))
		}
		t.Items = append(t.Items, ti)
	}
	return t
}

func (s *Simulation) truthParameters(i, g int) TruthParameters {
	d := &s.design
	t := TruthParameters{Parameters: s.parameters[i][g]}
	for _, shift := range d.Items[i].DIF {
		if shift.Group == g {
			t.Delta, t.Slope = shift.Delta, shift.Slope
		}
	}
	if delta, ok := populationDelta(s.parameters[i][0], s.parameters[i][g], d.Groups[0], d.Groups[g]); ok {
		t.PopulationDelta = &delta
	}
	return t
}

// sampleAbility returns the mean and the standard deviation of the abilities drawn
// for group g, summed one by one as deviations from the mean of the population.
func (s *Simulation) sampleAbility(g int) (mean float64, sd *float64) {
	random := newStream(s.design.Seed)
	group := s.design.Groups[g]
	var sum, squares float64
	for k := range group.N {
		x := s.ability(random, g, k) - group.Mean
		sum += x
		squares += x * x
	}
	n := float64(group.N)
	if group.N > 1 {
		v := math.Sqrt(max(0, squares-sum*sum/n) / (n - 1))
		sd = &v
	}
	return group.Mean + sum/n, sd
}
