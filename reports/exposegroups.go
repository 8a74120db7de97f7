package reports

import (
	"slices"

	"difaudit/dif"
)

// exposedGrouping shows how the candidates analysed fall on a compared grouping. Its
// counts add up to the candidates analysed and are guarded together. A small number of
// not stated needs no guard: it tells nobody's group.
type exposedGrouping struct {
	name      string
	labels    []string // compared, in the order of the comparisons
	counts    []count  // of labels
	others    []string // labels that stand in no comparison
	other     count    // the candidates of all of these together
	notStated count
}

// of returns the size of a compared group as it may be shown.
func (g *exposedGrouping) of(label string) count {
	if i := slices.Index(g.labels, label); i >= 0 {
		return g.counts[i]
	}
	return count{hiding: complement}
}

// exposeGroups guards the sizes of the groups of every compared grouping.
func exposeGroups(e *dif.Evidence) []exposedGrouping {
	var out []exposedGrouping
	for i := range e.Comparisons {
		name := e.Comparisons[i].Grouping
		if !slices.ContainsFunc(out, func(g exposedGrouping) bool { return g.name == name }) {
			out = append(out, exposeGrouping(e, name))
		}
	}
	hideLinked(out)
	return out
}

func exposeGrouping(e *dif.Evidence, name string) exposedGrouping {
	g := exposedGrouping{name: name}
	cells := []int{0} // other labels, then the compared ones
	notStated, shown := 0, 0
	for i := range e.Comparisons {
		c := &e.Comparisons[i]
		if c.Grouping != name {
			continue
		}
		notStated = c.Groups.NotStated
		for _, part := range []struct {
			label string
			n     int
		}{{c.Reference, c.Groups.Reference.N}, {c.Focal, c.Groups.Focal.N}} {
			if !slices.Contains(g.labels, part.label) {
				g.labels = append(g.labels, part.label)
				cells = append(cells, part.n)
				shown += part.n
			}
		}
	}
	for _, label := range labelsSeen(e.Inputs, name) {
		if !slices.Contains(g.labels, label) {
			g.others = append(g.others, label)
		}
	}
	cells[0] = max(0, e.Inputs.CandidatesAnalysed-shown-notStated)
	if notStated < smallest { // shown as it is, so that it can cover no other cell
		guardedCells := guardedSplit(cells, 0)
		g.notStated, g.other, g.counts = count{n: notStated}, guardedCells[0], guardedCells[1:]
		return g
	}
	guardedCells := guardedSplit(append(cells, notStated), 0, len(cells))
	last := len(guardedCells) - 1
	g.notStated, g.other, g.counts = guardedCells[last], guardedCells[0], guardedCells[1:last]
	return g
}

// hideLinked hides every size of a crossing when a size of it, or of another grouping
// with a part in common, is hidden: the labels of a crossing add up to those of its parts.
func hideLinked(groupings []exposedGrouping) {
	closed := make([]bool, len(groupings))
	for i := range groupings {
		for k := range groupings {
			if i != k && linked(groupings[i].name, groupings[k].name) && (groupings[i].anyHidden() || groupings[k].anyHidden()) {
				closed[i] = len(dif.GroupingParts(groupings[i].name)) > 1
			}
			if closed[i] {
				break
			}
		}
	}
	for i := range groupings {
		if closed[i] {
			groupings[i].hideAll()
		}
	}
}

func linked(a, b string) bool {
	parts := dif.GroupingParts(b)
	return slices.ContainsFunc(dif.GroupingParts(a), func(p string) bool { return slices.Contains(parts, p) })
}

func (g *exposedGrouping) cells() []*count {
	out := []*count{&g.notStated, &g.other}
	for i := range g.counts {
		out = append(out, &g.counts[i])
	}
	return out
}

func (g *exposedGrouping) anyHidden() bool {
	return slices.ContainsFunc(g.cells(), func(c *count) bool { return c.hiding != visible })
}

// hideAll hides what is still shown of the sizes; that nobody is there may be told.
func (g *exposedGrouping) hideAll() {
	for _, c := range g.cells() {
		if c.hiding == visible && c.n > 0 {
			*c = count{hiding: complement}
		}
	}
}
