package reports

import (
	"slices"

	"difaudit/dif"
)

// split shows how the exclusions of one grouping fall on its labels.
type split struct {
	grouping string
	labels   []string // "" is not stated, always the last
	reasons  []string
	counts   [][]count // by reason, then label
}

// splitExclusions gathers the exclusions split by label, each split guarded: its total
// is shown. Labels without an exclusion are cells too, so that one may cover another.
func splitExclusions(in dif.Inputs) []split {
	var out []split
	for _, ex := range in.Exclusions {
		if ex.Grouping == nil {
			continue
		}
		i := slices.IndexFunc(out, func(s split) bool { return s.grouping == *ex.Grouping })
		if i < 0 {
			i = len(out)
			out = append(out, split{grouping: *ex.Grouping, labels: labelsSeen(in, *ex.Grouping)})
		}
		s := &out[i]
		if label := value(ex.Label); label != "" && !slices.Contains(s.labels, label) {
			s.labels = append(s.labels, label)
		}
		if !slices.Contains(s.reasons, ex.Reason) {
			s.reasons = append(s.reasons, ex.Reason)
		}
	}
	for i := range out {
		s := &out[i]
		slices.Sort(s.labels)
		s.labels = append(s.labels, "")
		for _, reason := range s.reasons {
			cells := make([]int, len(s.labels))
			for _, ex := range in.Exclusions {
				if ex.Grouping != nil && *ex.Grouping == s.grouping && ex.Reason == reason {
					cells[slices.Index(s.labels, value(ex.Label))] += ex.Count
				}
			}
			s.counts = append(s.counts, guardedSplit(cells, len(cells)-1))
		}
	}
	return out
}

// labelsSeen returns the labels of a compared grouping, nil where the evidence does not
// list them.
func labelsSeen(in dif.Inputs, grouping string) []string {
	var labels []string
	for _, g := range in.Groupings {
		if g.Grouping == grouping {
			for _, l := range g.Labels {
				labels = append(labels, l.Label)
			}
		}
	}
	return labels
}
