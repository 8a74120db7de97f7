package intake

import "strings"

// headerRule says what the first row of a file is expected to hold.
type headerRule struct {
	required []string        // columns without which the file cannot be read
	known    map[string]bool // names the file may have, in lower case
	advice   string          // what a header of this file holds
}

// newHeaderRule returns the rule of a file with the given columns, of which the first
// ones are required.
func newHeaderRule(required int, columns []string, advice string) *headerRule {
	h := &headerRule{required: columns[:required], known: map[string]bool{}, advice: advice}
	h.know(columns...)
	return h
}

func (h *headerRule) know(names ...string) {
	for _, name := range names {
		if name != "" {
			h.known[strings.ToLower(name)] = true
		}
	}
}

// complete reports whether the names hold all required columns.
func (h *headerRule) complete(names []string) bool {
	for _, required := range h.required {
		has := false
		for _, name := range names {
			has = has || name == required
		}
		if !has {
			return false
		}
	}
	return true
}

// absent reports whether a first row is no header: it lacks a required column, and
// holds no name the file may have or looks like data.
func (h *headerRule) absent(names []string) bool {
	if h.complete(names) {
		return false
	}
	for _, name := range names {
		if h.known[strings.ToLower(name)] {
			return likeData(names)
		}
	}
	return true
}

// likeData reports whether the cells of a row look like answers: values occur again,
// and half of the cells are whole numbers or repetitions.
func likeData(cells []string) bool {
	filled, numbers := 0, 0
	distinct := map[string]bool{}
	for _, cell := range cells {
		if cell == "" {
			continue
		}
		filled++
		distinct[cell] = true
		if _, whole := plainInteger(cell); whole {
			numbers++
		}
	}
	repeated := filled - len(distinct)
	return repeated > 0 && (2*numbers >= filled || 2*repeated >= filled)
}

// responseHeader returns the rule of the response file.
func (r *reading) responseHeader() *headerRule {
	advice := "candidate_id and one column per item (and perhaps form, attempt, external_score and groupings), or candidate_id, item_id and response for one row per answer"
	h := newHeaderRule(1, []string{candidateColumn, "item_id", "response", "form", "attempt", "external_score"}, advice)
	for _, it := range r.items.items {
		h.know(it.ID)
	}
	r.knowGroupings(h)
	return h
}

// candidateHeader returns the rule of the candidates file.
func (r *reading) candidateHeader() *headerRule {
	h := newHeaderRule(1, []string{candidateColumn}, "candidate_id and one column per grouping")
	r.knowGroupings(h)
	return h
}

// knowGroupings adds the columns that the plan names.
func (r *reading) knowGroupings(h *headerRule) {
	for _, g := range r.groupings {
		h.know(g.name)
	}
	for name := range r.plan.Groupings {
		h.know(name)
	}
	h.know(r.plan.Columns.Groupings...)
	h.know(r.plan.Columns.Ignore...)
}
