package reports

import (
	"fmt"
	"slices"
	"strings"

	"difaudit/dif"
)

// limitsSection says what was not tested, what the results do not carry, and how to
// check the report.
func (r *report) limitsSection() {
	r.section(titleLimits, titleLimits, false)
	r.heading("What was not tested", 14)
	for _, text := range r.notTested() {
		r.bullet(text)
	}
	r.heading("Cautions", 20)
	for i, c := range cautions(r.x) {
		r.entry(fmt.Sprintf("%d. %s", i+1, c.term), c.text, 43)
	}
	r.heading("How to check this report", 30)
	digest := r.options.EvidenceSHA256
	if digest == "" {
		digest = "not given"
	}
	r.entry("Evidence", "This report shows one evidence document, the complete machine-readable result. Its SHA-256 is "+digest+".", 43)
	r.entry("Data", "The digest of the analysed data is "+r.x.inputs.DataSHA256+". It is taken over the data in canonical order, not over the files received.", 43)
	r.entry("Command", "difaudit verify EVIDENCE checks the document by itself and prints its SHA-256, to be compared with the one above. "+
		"With the response, item, form and candidate files it checks their digests too and repeats the whole audit. Statistics: difaudit "+r.x.engine.Version+".", 43)
	r.entry("Handling", "The evidence is internal: it holds counts of small groups that this report withholds. It is not for publication.", 43)
	if r.altered > 0 {
		r.entry("Characters", r.alteredText(), 43)
	}
}

// notTested lists, beyond single items, what the audit did not look at.
func (r *report) notTested() []string {
	p := r.x.plan
	var out []string
	var none, some int
	for i := range r.x.comparisons {
		switch t := r.x.comparisons[i].tally(); {
		case t.letters() == 0:
			none++
		case t.noVerdict > 0:
			some++
		}
	}
	if none > 0 {
		out = append(out, fmt.Sprintf("In %s no item could be given a letter; the sections give the reasons.", plural(none, "comparison", "comparisons")))
	}
	if some > 0 {
		out = append(out, fmt.Sprintf("In %s part of the items could be given no letter; the sections list them with reasons.", plural(some, "comparison", "comparisons")))
	}
	var withheld []string
	for i := range r.x.comparisons {
		if c := &r.x.comparisons[i]; c.withheld {
			withheld = append(withheld, fmt.Sprintf("%s, %s against %s", c.Grouping, c.Focal, c.Reference))
		}
	}
	if len(withheld) > 0 {
		out = append(out, "Withheld because a group holds fewer than 10 candidates: "+list(withheld, 30)+".")
	}
	out = append(out, r.labelsNotCompared()...)
	var unused []string
	for _, m := range dif.Methods() {
		if !slices.Contains(p.Methods, m.ID()) {
			unused = append(unused, spoken(m.ID()))
		}
	}
	if len(unused) > 0 {
		out = append(out, "Methods the plan left out: "+strings.Join(unused, ", ")+".")
	}
	var questions []string
	for _, q := range questionsElsewhere {
		if !slices.Contains(p.Methods, q.id) {
			questions = append(questions, q.text)
		}
	}
	if len(questions) > 0 {
		out = append(out, "Not part of this audit: "+strings.Join(questions, "; ")+".")
	}
	return append(out,
		"Attributes that were not collected, groups that the plan does not name, and combinations of groups it does not cross.",
		"Effects on total scores and decisions about candidates, and the judgement of people on the items.")
}

// labelsNotCompared names the groupings that the plan declares and never compares, and
// the labels of compared groupings, seen in the data or declared, that stand in no
// comparison.
func (r *report) labelsNotCompared() []string {
	var unused []string
	for name := range r.x.plan.Groupings {
		if !slices.ContainsFunc(r.x.groupings, func(g exposedGrouping) bool { return slices.Contains(dif.GroupingParts(g.name), name) }) {
			unused = append(unused, name)
		}
	}
	slices.Sort(unused)
	var out []string
	if len(unused) > 0 {
		out = append(out, "Groupings that the plan declares and does not compare: "+list(unused, 40)+".")
	}
	for _, g := range r.x.groupings {
		labels := slices.Clone(g.others)
		for _, label := range r.x.plan.Groupings[g.name].Labels {
			if !slices.Contains(g.labels, label) && !slices.Contains(labels, label) {
				labels = append(labels, label)
			}
		}
		if len(labels) > 0 {
			out = append(out, "Labels of "+g.name+" that stand in no comparison: "+list(labels, 100)+".")
		}
	}
	return out
}
