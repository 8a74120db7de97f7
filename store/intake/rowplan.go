package intake

import "difaudit/dif"

// rowPlan says how the answers of one form are read.
type rowPlan struct {
	order     []int // items on the form in order of presentation
	off       []int // items that are not
	unordered bool  // the order is not known
}

// rowPlans returns one plan per form, or a single one where what forms hold is not declared.
func (r *reading) rowPlans() []rowPlan {
	if !r.forms.declared || r.forms.broken {
		var all rowPlan
		for i := range r.items.items {
			all.order = append(all.order, i)
		}
		all.unordered = r.long && !r.items.declared
		return []rowPlan{all}
	}
	plans := make([]rowPlan, len(r.forms.forms))
	for f, form := range r.forms.forms {
		on := make([]bool, len(r.items.items))
		for _, e := range form.entries {
			if e.item.index < len(on) && r.items.items[e.item.index] == e.item {
				on[e.item.index] = true
				plans[f].order = append(plans[f].order, e.item.index)
			}
		}
		for i := range on {
			if !on[i] {
				plans[f].off = append(plans[f].off, i)
			}
		}
	}
	return plans
}

// clearOffForm sets the items that are not on the candidate's form to not presented.
func (r *reading) clearOffForm(i int, row []byte, plan *rowPlan) {
	for _, slot := range plan.off {
		it, code := r.items.items[slot], row[slot]
		row[slot] = dif.CodeNotPresented
		switch {
		case code == blankCode || code == dif.CodeNotPresented:
		case code <= dif.MaxCode || code == dif.CodeInvalid:
			r.problems.add(answerOffForm, r.responses.name, int(r.records.rows[i]), shown(it.ID),
				"there is an answer and the candidate's form does not hold this item; correct the form of the row or the forms file")
		default:
			r.problems.add(missingCodeOffForm, r.responses.name, int(r.records.rows[i]), shown(it.ID),
				"the candidate's form does not hold this item; the answer counts as not presented")
		}
	}
}
