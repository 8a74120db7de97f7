package simulate

import (
	"fmt"
	"math"
)

// Spread of drawn item parameters.
const (
	logSlopeSD   = 0.25 // of ln a around 0; under the Rasch model a is 1
	difficultySD = 1.0  // of b around 0
	logitGuessSD = 0.25 // of logit c around the logit of pure guessing
	guessUnknown = 0.2  // pure guessing where the number of options is not stated
)

// drawItem returns the parameters of item i that the design leaves open. The numbers
// are drawn in one order whatever the model, so that an item is as difficult under
// one model as under another.
func (d Design) drawItem(s *stream, i int) Parameters {
	s.start(forItem, 0, i)
	b := difficultySD * s.normal()
	a := math.Exp(logSlopeSD * s.normal())
	guess := guessUnknown
	if d.Options > 0 {
		guess = 1 / float64(d.Options)
	}
	c := 1 / (1 + (1-guess)/guess*math.Exp(-logitGuessSD*s.normal()))
	if d.Model == Rasch {
		a = 1
	}
	if d.Model != ThreePL {
		c = 0
	}
	return Parameters{A: a, B: Thresholds{b}, C: c}
}

// shifted returns the parameters in a focal group under planted DIF; an error says
// that no positive slope is left.
func (p Parameters) shifted(s Shift) (Parameters, error) {
	a := p.A + s.Slope
	if !(a > 0) {
		return Parameters{}, fmt.Errorf("its slope is %.3f in the reference group: plant a slope shift above %.3f", p.A, -p.A)
	}
	b := p.B[0] - s.Delta/(deltaScale*a)
	return Parameters{A: a, B: Thresholds{b}, C: p.C}, nil
}

// groupParameters returns the parameters of item i in every group.
func (d Design) groupParameters(s *stream, i int) ([]Parameters, error) {
	item := &d.Items[i]
	reference := item.Parameters
	if reference == nil {
		drawn := d.drawItem(s, i)
		reference = &drawn
	}
	groups := make([]Parameters, len(d.Groups))
	for g := range groups {
		groups[g] = Parameters{A: reference.A, B: Thresholds{reference.B[0]}, C: reference.C}
	}
	for _, shift := range item.DIF {
		focal, err := reference.shifted(shift)
		if err != nil {
			return nil, fmt.Errorf("item %d: %w", i+1, err)
		}
		groups[shift.Group] = focal
	}
	return groups, nil
}
