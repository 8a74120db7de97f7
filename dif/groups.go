package dif

import (
	"fmt"
	"slices"
	"strings"
)

// groupingCodes gives every candidate a label of a grouping, plain or crossed.
type groupingCodes struct {
	name   string
	labels []string // sorted
	codes  []int32  // per candidate, index into labels; -1 not stated
}

// grouping returns the labels of a plain grouping or of a crossing: a candidate has a
// label of a crossing when every part is stated.
func (d *Data) grouping(name string) (*groupingCodes, error) {
	parts := make([]*Grouping, 0, 2)
	for _, part := range GroupingParts(name) {
		i := slices.IndexFunc(d.Groupings, func(g Grouping) bool { return g.Name == part })
		if i < 0 {
			return nil, fmt.Errorf("grouping %s is not in the data: name a grouping column of the responses or candidates file", part)
		}
		parts = append(parts, &d.Groupings[i])
	}
	g := &groupingCodes{name: name, codes: make([]int32, d.Candidates())}
	if len(parts) == 1 {
		g.labels = parts[0].Labels
		for c, code := range parts[0].Codes {
			g.codes[c] = int32(code) - 1
		}
		return g, nil
	}
	radix := 1
	for _, p := range parts {
		radix *= len(p.Labels) + 1
		if radix > 1<<24 {
			return nil, fmt.Errorf("grouping %s has too many combinations of labels to be crossed", name)
		}
	}
	seen := map[int]string{}
	mixed := make([]int, d.Candidates())
	for c := range mixed {
		var at int
		stated := true
		for _, p := range parts {
			code := int(p.Codes[c])
			stated = stated && code > 0
			at = at*(len(p.Labels)+1) + code
		}
		if !stated {
			mixed[c] = -1
			continue
		}
		mixed[c] = at
		if _, ok := seen[at]; !ok {
			labels := make([]string, len(parts))
			for i, p := range parts {
				labels[i] = p.Labels[p.Codes[c]-1]
			}
			seen[at] = strings.Join(labels, "+")
		}
	}
	for _, label := range seen {
		g.labels = append(g.labels, label)
	}
	slices.Sort(g.labels)
	g.labels = slices.Compact(g.labels)
	index := map[int]int32{}
	for at, label := range seen {
		i, _ := slices.BinarySearch(g.labels, label)
		index[at] = int32(i)
	}
	for c, at := range mixed {
		g.codes[c] = -1
		if at >= 0 {
			g.codes[c] = index[at]
		}
	}
	return g, nil
}

// labelled is a comparison with its place in the evidence.
type labelled struct {
	grouping, reference, focal string
}

// expand returns the comparisons of the plan in order, with FocalEach written out:
// every declared label, or without a declaration every label in the data, but the
// reference. A label named by the plan that is not in the data is an error.
func (p Plan) expand(groupings map[string]*groupingCodes) ([]labelled, error) {
	var out []labelled
	for _, c := range p.Comparisons {
		g := groupings[c.Grouping]
		require := func(label string) error {
			if _, ok := slices.BinarySearch(g.labels, label); !ok {
				return fmt.Errorf("comparison %s %s/%s: no candidate has the label %q of %s; the labels are %s",
					c.Grouping, c.Reference, c.Focal, label, c.Grouping, strings.Join(g.labels, ", "))
			}
			return nil
		}
		if err := require(c.Reference); err != nil {
			return nil, err
		}
		if c.Focal != FocalEach {
			if err := require(c.Focal); err != nil {
				return nil, err
			}
			out = append(out, labelled{c.Grouping, c.Reference, c.Focal})
			continue
		}
		labels := g.labels
		if declared := p.Groupings[c.Grouping].Labels; len(declared) > 0 {
			labels = declared
		}
		found := false
		for _, label := range labels {
			if label != c.Reference {
				found = true
				out = append(out, labelled{c.Grouping, c.Reference, label})
			}
		}
		if !found {
			return nil, fmt.Errorf("comparison %s %s/each: there is no other label to compare", c.Grouping, c.Reference)
		}
	}
	for i, c := range out {
		if slices.Contains(out[:i], c) {
			return nil, fmt.Errorf("comparison %s %s/%s stands twice, once through focal: each", c.grouping, c.reference, c.focal)
		}
	}
	return out, nil
}
