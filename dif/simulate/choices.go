package simulate

import (
	"math"
	"slices"
)

// attractionSD is the standard deviation of the log of how strongly a wrong option
// attracts: the strongest of three is then usually chosen several times as often as
// the weakest.
const attractionSD = 0.7

// choices describes the options of one item.
type choices struct {
	key    int       // index of the right option
	shares []float64 // of each option among wrong answers; 0 for the key
	upTo   []float64 // running sums of shares
}

// optionLabels returns the labels of n options: A, B and so on.
func optionLabels(n int) []string {
	labels := make([]string, n)
	for i := range labels {
		labels[i] = string(rune('A' + i))
	}
	return labels
}

// drawChoices returns the key of item i, drawn evenly unless stated, and the
// attraction of its wrong options, which is the same in all groups and at all
// abilities.
func (d Design) drawChoices(s *stream, i int) choices {
	s.start(forChoices, 0, i)
	c := choices{key: s.rand.IntN(d.Options), shares: make([]float64, d.Options), upTo: make([]float64, d.Options)}
	if key := d.Items[i].Key; key != "" {
		c.key = slices.Index(optionLabels(d.Options), key)
	}
	sum := 0.0
	for o := range c.shares {
		if w := math.Exp(attractionSD * s.normal()); o != c.key {
			c.shares[o] = w
			sum += w
		}
	}
	total := 0.0
	for o := range c.shares {
		c.shares[o] /= sum
		total += c.shares[o]
		c.upTo[o] = total
	}
	return c
}

// wrong returns the wrong option that u, from 0 to below 1, falls on.
func (c *choices) wrong(u float64) int {
	last := c.key
	for o, share := range c.shares {
		if share == 0 {
			continue
		}
		if u < c.upTo[o] {
			return o
		}
		last = o // for a sum of shares that rounding left below u
	}
	return last
}
