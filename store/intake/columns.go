package intake

import (
	"slices"
	"strings"

	"difaudit/dif"
)

// use is what a column of the response file is for.
type use byte

const (
	useNothing    use = iota // ignored, or a grouping no comparison needs
	useSpecial               // candidate_id, form, attempt, external_score; item_id and response of a long file
	useGrouping              // a grouping some comparison needs
	useItem                  // an item that is described
	usePresumed              // an item unless a cell shows otherwise
	useUndeclared            // none of these: the run stops
)

// columnUse decides what a column of the response file is for.
func (r *reading) columnUse(name string) use {
	special := []string{"form", "attempt", "external_score"}
	if r.long {
		special = []string{"form", "attempt", "item_id", "response"}
	}
	_, ruled := r.plan.Groupings[name]
	switch {
	case name == candidateColumn:
		return useSpecial
	case slices.ContainsFunc(r.groupings, func(g *grouping) bool { return g.name == name }):
		return useGrouping
	case name == "" || slices.Contains(r.plan.Columns.Ignore, name):
		return useNothing
	case slices.Contains(special, name):
		return useSpecial
	case ruled || slices.Contains(r.plan.Columns.Groupings, name):
		return useNothing
	case r.long:
		return useUndeclared
	case len(r.items.byID[name]) > 0:
		return useItem
	case r.items.declared:
		return useUndeclared
	}
	return usePresumed
}

// specialColumns returns the places of the columns with a meaning of their own.
func (r *reading) specialColumns() special {
	at := func(name string) int {
		if field, has := r.responses.column[name]; has && r.columnUse(name) == useSpecial {
			return field
		}
		return -1
	}
	return special{
		id: at(candidateColumn), item: at("item_id"), response: at("response"),
		form: at("form"), attempt: at("attempt"), external: at("external_score"),
	}
}

// newRecords prepares to take over candidate records.
func (r *reading) newRecords(at special, groups []int) {
	rec := &records{ids: &dif.IDs{}, labels: make([][]uint16, len(groups)), formless: map[int]bool{}}
	rec.answers = dif.NewAnswers(len(r.items.items))
	if at.form >= 0 || r.forms.declared {
		rec.form = []uint16{}
	}
	if at.form < 0 && len(r.forms.forms) > 1 {
		r.forms.broken = true
		r.problems.add(formColumnMissing, r.responses.name, 1, "form",
			"the forms file describes %d forms and no column form says who sat which; add the column", len(r.forms.forms))
	}
	if at.attempt >= 0 {
		rec.attempt = []int32{}
	}
	if at.external >= 0 {
		rec.external = []float64{}
	} else if r.plan.Matching.Variable == dif.MatchExternal {
		r.problems.add(externalScoreMissing, r.responses.name, 1, "external_score",
			"the plan matches on an external score and there is no such column; add it to a wide response file, or choose another matching.variable")
	}
	for g, field := range groups {
		if field >= 0 {
			rec.labels[g] = []uint16{}
		}
	}
	r.records = rec
}

// newItem describes an item that is known from the response file only.
func (r *reading) newItem(id string) *item {
	it := &item{file: r.responses.name, row: r.responses.row}
	it.ID, it.Version, it.Role = strings.Clone(id), "1", dif.RoleOperational
	return it
}

// missingGroupings reports groupings of comparisons that are in no file.
func (r *reading) missingGroupings() {
	if r.request.Candidates != nil && r.candidates == nil {
		return // the columns of some file are not known
	}
	var have []string
	for _, name := range r.responses.header {
		if !r.responses.complete {
			break // the header may hold data
		}
		if u := r.columnUse(name); u == useNothing || u == useGrouping || u == useUndeclared || u == usePresumed {
			have = append(have, name)
		}
	}
	file := r.request.Responses.Name
	if r.candidates != nil {
		have = append(have, r.candidates.unused...)
		for _, g := range r.groupings {
			if _, has := r.candidates.table.column[g.name]; has {
				have = append(have, g.name)
			}
		}
		file = r.request.Candidates.Name
	}
	slices.Sort(have)
	have = slices.DeleteFunc(slices.Compact(have), func(name string) bool { return name == "" })
	names := make([]string, 0, len(have))
	for _, name := range have[:min(len(have), 40)] {
		names = append(names, shown(name))
	}
	columns := " (there is no column that could be one)"
	switch {
	case !r.responses.complete:
		columns = ""
	case len(names) > 0:
		columns = " (the columns are " + strings.Join(names, ", ")
		if len(have) > len(names) {
			columns += ", ..."
		}
		columns += ")"
	}
	for _, g := range r.groupings {
		if !g.found {
			r.problems.add(missingGrouping, file, 0, g.name,
				"a comparison uses the grouping %s and no file has such a column; correct the comparison, or add the column to the candidates file%s", shown(g.name), columns)
		}
	}
}

// groupColumns returns the field of every grouping the plan uses in the response file, -1
// where it has none, and marks those found.
func (r *reading) groupColumns() []int {
	fields := make([]int, len(r.groupings))
	for g, grouping := range r.groupings {
		fields[g] = -1
		if field, has := r.responses.column[grouping.name]; has {
			grouping.found = true
			fields[g] = field
		}
	}
	return fields
}
