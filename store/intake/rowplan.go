package intake

import "difaudit/dif"

// rowPlan says how the answers of one form are read.
type rowPlan struct {
	order     []int // items on the form in order of presentation
	all       bool  // the form holds every item
	unordered bool  // the order is not known
}

// rowPlans returns one plan per form, or a single one where what forms hold is not declared.
func (r *reading) rowPlans() []rowPlan {
	if !r.forms.declared || r.forms.broken {
		all := rowPlan{all: true, unordered: r.long && !r.items.declared}
		for i := range r.items.items {
			all.order = append(all.order, i)
		}
		return []rowPlan{all}
	}
	plans := make([]rowPlan, len(r.forms.forms))
	for f, form := range r.forms.forms {
		for _, e := range form.entries {
			if e.item.index < len(r.items.items) && r.items.items[e.item.index] == e.item {
				plans[f].order = append(plans[f].order, e.item.index)
			}
		}
		plans[f].all = len(plans[f].order) == len(r.items.items) // a form holds an item once
	}
	return plans
}

// presented marks the items of one form at a time.
type presented struct {
	plan *rowPlan
	on   []bool // per item
}

// turnTo marks the items of a plan.
func (p *presented) turnTo(plan *rowPlan) {
	if p.plan == plan {
		return
	}
	if p.plan != nil {
		for _, slot := range p.plan.order {
			p.on[slot] = false
		}
	}
	for _, slot := range plan.order {
		p.on[slot] = true
	}
	p.plan = plan
}

// clearOffForm sets the items that are not on the candidate's form to not presented.
func (r *reading) clearOffForm(i int, row []byte, plan *rowPlan, marks *presented) {
	if plan.all {
		return
	}
	marks.turnTo(plan)
	for slot, on := range marks.on {
		if on {
			continue
		}
		it, code := r.items.items[slot], row[slot]
		row[slot] = dif.CodeNotPresented
		switch {
		case code == blankCode || code == dif.CodeNotPresented || it.suspect:
		case code <= dif.MaxCode || code == dif.CodeInvalid:
			r.problems.add(answerOffForm, r.responses.name, int(r.records.rows[i]), shown(it.ID),
				"there is an answer and the candidate's form does not hold this item; correct the form of the row or the forms file")
		default:
			r.problems.add(missingCodeOffForm, r.responses.name, int(r.records.rows[i]), shown(it.ID),
				"the candidate's form does not hold this item; the answer counts as not presented")
		}
	}
}
