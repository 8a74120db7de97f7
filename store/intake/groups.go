package intake

import (
	"slices"
	"strings"
	"unicode/utf8"

	"difaudit/dif"
)

// Codes of a group label while the files are read; 0 is not stated and any other
// number 1 + the place of the label in order of first occurrence.
const (
	codeSeveral    = 0xFFFF
	codeUndeclared = 0xFFFE
	maxLabels      = 0xFFFD
)

// grouping collects the labels of one plain grouping.
type grouping struct {
	name    string
	rule    dif.GroupingRule
	labels  []string
	byLabel map[string]uint16
	cells   map[string]uint16 // by cell as it stands in the file
	several uint16            // what several labels become
	found   bool              // some file has the column
	faulty  bool              // some cell could not be used

	notStated int // records that stay and have no stated label
}

func newGrouping(name string, rule dif.GroupingRule) *grouping {
	g := &grouping{name: name, rule: rule, byLabel: map[string]uint16{}, cells: map[string]uint16{}, several: codeSeveral}
	switch rule.Several {
	case "":
	case dif.SeveralNotStated:
		g.several = 0
	default:
		g.several = g.learn(rule.Several)
	}
	return g
}

// learn returns the code of a label.
func (g *grouping) learn(label string) uint16 {
	if c, known := g.byLabel[label]; known {
		return c
	}
	if len(g.labels) == maxLabels {
		return codeUndeclared
	}
	label = strings.Clone(label)
	g.labels = append(g.labels, label)
	c := uint16(len(g.labels))
	g.byLabel[label] = c
	return c
}

// read returns the code of a cell and reports what is wrong with it.
func (g *grouping) read(cell string, t *table, problems *Problems) uint16 {
	code, known := g.cells[cell]
	if !known {
		code = g.classify(strings.TrimSpace(cell))
		if len(g.cells) < 4*maxLabels && len(cell) <= maxNameBytes {
			g.cells[strings.Clone(cell)] = code
		}
	}
	if code < codeUndeclared {
		return code
	}
	switch {
	case code == codeSeveral && g.several != codeSeveral:
		return code
	case code == codeSeveral:
		problems.add(severalLabels, t.name, t.row, g.name,
			"the cell holds several labels; declare in the plan what they become (groupings.%s.several: not_stated, or a label)", g.name)
	case slices.ContainsFunc(strings.Split(cell, ";"), longLabel):
		problems.add(badValue, t.name, t.row, g.name, "the label is longer than %s; shorten it, or check the quotation marks of this row", nameLimit)
	case !utf8.ValidString(cell):
		problems.add(badEncoding, t.name, t.row, g.name, "the cell is not UTF-8; save the file as UTF-8")
	case len(g.labels) == maxLabels:
		problems.add(tooManyLabels, t.name, t.row, g.name, "the column has more than %d different labels, so it is no grouping; declare it with --ignore", maxLabels)
	default:
		problems.add(undeclaredLabel, t.name, t.row, g.name,
			"the label is not among those the plan declares; correct the cell, or add the label under groupings.%s.labels or groupings.%s.not_stated", g.name, g.name)
	}
	g.faulty = true
	return code
}

// classify returns the code of a trimmed cell.
func (g *grouping) classify(cell string) uint16 {
	switch {
	case cell == "" || slices.Contains(g.rule.NotStated, cell):
		return 0
	case slices.Contains(g.rule.Labels, cell):
		return g.learn(cell)
	case strings.Contains(cell, ";"):
		first := uint16(0)
		several := false
		for part := range strings.SplitSeq(cell, ";") {
			code := g.classify(strings.TrimSpace(part))
			switch {
			case code == codeUndeclared:
				return code
			case code != 0 && first != 0 && code != first:
				several = true
			case code != 0:
				first = code
			}
		}
		if several {
			return codeSeveral
		}
		return first
	case !utf8.ValidString(cell) || len(g.rule.Labels) > 0 || longLabel(cell):
		return codeUndeclared
	}
	return g.learn(cell)
}

func longLabel(label string) bool { return len(strings.TrimSpace(label)) > maxNameBytes }

// combine returns the label of a candidate with the labels a and b; several where
// they differ. A stated label outweighs one that is not.
func combine(a, b uint16) uint16 {
	switch {
	case a == codeUndeclared || b == codeUndeclared:
		return codeUndeclared
	case a == 0 || a == b:
		return b
	case b == 0:
		return a
	}
	return codeSeveral
}

// finish returns the grouping of the candidates with the given codes, with the
// labels that occur sorted bytewise.
func (g *grouping) finish(codes []uint16) dif.Grouping {
	seen := make([]bool, len(g.labels)+1)
	for _, c := range codes {
		seen[c] = true
	}
	out := dif.Grouping{Name: g.name, Labels: []string{}, Codes: codes}
	for i, label := range g.labels {
		if seen[i+1] {
			out.Labels = append(out.Labels, label)
		}
	}
	slices.Sort(out.Labels)
	recode := make([]uint16, len(g.labels)+1)
	for i, label := range g.labels {
		if place, ok := slices.BinarySearch(out.Labels, label); ok {
			recode[i+1] = uint16(place + 1)
		}
	}
	for i, c := range codes {
		codes[i] = recode[c]
	}
	return out
}
