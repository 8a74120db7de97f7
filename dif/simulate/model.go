package simulate

import (
	"encoding/json"
	"math"
)

// Model names an item response model.
type Model string

// The models responses can be made under.
const (
	Rasch   Model = "rasch" // one slope for all items, no guessing
	TwoPL   Model = "2pl"   // two-parameter logistic
	ThreePL Model = "3pl"   // three-parameter logistic
)

// Models lists the models in order of their number of parameters.
func Models() []Model { return []Model{Rasch, TwoPL, ThreePL} }

// Parameters are the parameters of one item in one group, on the metric of the
// abilities and with D = 1.
type Parameters struct {
	A float64    `json:"a"` // slope
	B Thresholds `json:"b"` // difficulty; one value for an item scored 0 or 1
	C float64    `json:"c"` // probability of a correct answer at very low ability
}

// Thresholds holds one difficulty for each score above 0.
type Thresholds []float64

// MarshalJSON writes the one difficulty of an item scored 0 or 1 as a number, and
// several as a list.
func (t Thresholds) MarshalJSON() ([]byte, error) {
	if len(t) == 1 {
		return json.Marshal(t[0])
	}
	return json.Marshal([]float64(t))
}

// Correct returns the probability of a correct answer at ability theta to an item
// scored 0 or 1.
//
// Source: Birnbaum (1968), in Lord & Novick, Statistical Theories of Mental Test
// Scores, chapters 17-20 (from memory).
func (p Parameters) Correct(theta float64) float64 {
	return p.C + (1-p.C)/(1+math.Exp(-p.A*(theta-p.B[0])))
}

// equal reports whether two items scored 0 or 1 have the same parameters.
func (p Parameters) equal(q Parameters) bool {
	return p.A == q.A && p.B[0] == q.B[0] && p.C == q.C
}
