package intake

import "difaudit/dif"

// settle joins, checks and orders what was read. It returns nil where errors are left.
func (r *reading) settle() *dif.Data {
	rec := r.records
	people := r.joinCandidates()
	order := rec.order()
	r.combineLabels(order, people)
	kept, exclusions := r.exclude(order)
	r.checkLabels(kept)
	r.checkIdentifiers(order)
	used := make([]bool, len(rec.rows))
	for _, i := range kept {
		used[i] = true
	}
	recodings := r.finishItems()
	r.settleAnswers(used, recodings)
	r.countNotStated(used)
	if r.problems.HasErrors() {
		return nil
	}
	return r.arrange(kept, exclusions)
}

// arrange builds the data from the records kept, in their order.
func (r *reading) arrange(kept []int32, exclusions []dif.Exclusion) *dif.Data {
	rec := r.records
	d := &dif.Data{
		IDs: rec.ids.Arrange(kept), Answers: rec.answers,
		FormOf: pick(rec.form, kept), External: pick(rec.external, kept),
		Sources: r.sources, Received: len(rec.rows), Exclusions: exclusions, Warnings: r.warnings(),
	}
	if r.plan.Attempts == dif.AttemptsAll {
		d.Attempt = pick(rec.attempt, kept)
	}
	d.Answers.Arrange(kept)
	for _, it := range r.items.items {
		d.Items = append(d.Items, it.Item)
	}
	for g, codes := range rec.labels {
		d.Groupings = append(d.Groupings, r.groupings[g].finish(pick(codes, kept)))
	}
	r.forms.finish(d)
	return d
}

// pick returns the values at the given places, nil for nil.
func pick[T any](values []T, places []int32) []T {
	if values == nil {
		return nil
	}
	out := make([]T, len(places))
	for i, p := range places {
		out[i] = values[p]
	}
	return out
}

// settleAnswers gives empty cells their meaning, checks answers against forms and
// recodes choices. used marks the records that stay.
func (r *reading) settleAnswers(used []bool, recodings []*recoding) {
	rec := r.records
	plans := r.rowPlans()
	r.lost = r.lost || r.long && r.responses.dropped > 0
	blanks := &blankCount{reading: r, items: make([]int, len(r.items.items))}
	marks := &presented{on: make([]bool, len(r.items.items))}
	empty := r.plan.Missing.Empty
	type slotRecoding struct {
		slot  int
		codes *recoding
	}
	var recode []slotRecoding
	for i, codes := range recodings {
		if codes != nil && *codes != *sameCodes() {
			recode = append(recode, slotRecoding{i, codes})
		}
	}
	for i := range rec.rows {
		row := rec.answers.Row(i)
		plan := &plans[0]
		if len(plans) > 1 {
			plan = &plans[rec.form[i]]
		}
		if !rec.formless[i] {
			r.clearOffForm(i, row, plan, marks)
		}
		switch {
		case r.forms.broken || r.lost || rec.formless[i]: // what is blank cannot be told
		case empty == "":
			if used[i] {
				blanks.row(i, row)
			}
		case empty == dif.EmptyByPosition && plan.unordered:
			if used[i] {
				blanks.unplaced += countBlanks(row)
			}
		default:
			fillBlanks(row, plan.order, empty)
		}
		for _, s := range recode {
			row[s.slot] = s.codes[row[s.slot]]
		}
	}
	blanks.report(used)
}
