package reports

import (
	"fmt"
	"slices"
	"strings"

	"difaudit/dif"
)

// methodSection words the plan: comparisons, methods, criteria and rules, with sources.
func (r *report) methodSection() {
	r.section(titleMethods, "How the items were compared", false)
	p := r.x.plan
	const term = 43
	r.heading("Methods", 20)
	for _, id := range p.Methods {
		i := slices.IndexFunc(methodsInWords, func(m methodWords) bool { return m.id == id })
		if i < 0 {
			r.entry(spoken(id), "Its values stand in the table of further statistics of each comparison.", term)
			continue
		}
		r.entry(methodsInWords[i].name, methodsInWords[i].text, term)
	}
	r.entry("q-values", "p-values of one comparison adjusted so that the expected share of false alarms among the items called significant stays below the level (Benjamini & Hochberg 1995). They are shown and never decide a letter.", term)

	r.heading("Letters", 20)
	r.paragraph("The published rule (Dorans & Holland 1993; Zieky 1993; Zwick 2012), applied to unrounded values:", body)
	r.space(1)
	for _, l := range letterRule(p.Criteria) {
		r.entry(l[0], l[1], term)
	}
	correction := "The chi-square without continuity correction decides; the corrected one is conservative (Paek 2010). This departs from the first published form of the rule, which used the correction; items whose letter depends on it are listed with each comparison."
	if p.Criteria.ContinuityCorrection {
		correction = "The chi-square with continuity correction decides, as in the first published form of the rule; it is conservative (Paek 2010). Items whose letter depends on it are listed with each comparison."
	}
	r.entry("Correction", correction, term)

	r.heading("The programme's policy", 30)
	c := p.Criteria
	name := c.Name
	if name == "" {
		name = "without a name"
	}
	r.table([]tableColumn{{"Criterion", 62, alignLeft}, {"Value", 26, alignRight}, {head: "Source"}}, [][]tableCell{
		cells("Criteria", name, "this programme"),
		cells("Level of the test of no difference", shortest(&c.ClassAlpha), "the published rule uses 0.05"),
		cells("Least candidates, smaller group", whole(c.MinSmallerGroup), "Zwick (2012) gives 200 before operational use, 300 after"),
		cells("Least candidates, both groups", whole(c.MinTotal), "Zwick (2012) gives 500 before operational use, 700 after"),
		cells("Level of false discovery", shortest(&c.FalseDiscovery), "Benjamini & Hochberg (1995); the level is the programme's"),
		cells("Continuity correction", yesNo(c.ContinuityCorrection), "see above"),
	}, 8)
	r.paragraph("Least numbers count candidates who could be matched, item by item. Below them no letter is given; the letter that would follow is shown in parentheses as provisional.", caption)

	r.heading("Matching and scoring", 30)
	variables := r.matchingVariables()
	for _, v := range variables {
		text := capitalized(matchingWords(v.variable)) + "; " + levelWords(p.Matching.Levels) + "."
		if len(variables) > 1 {
			text = fmt.Sprintf("In %s: %s", v.where(), text)
		}
		r.entry("Matched on", text, term)
	}
	r.entry("Refinement", r.refinementText(variables), term)
	r.entry("Missing answers", "Omitted and invalid answers count as wrong. Answers not reached count as wrong in the matching score, and the candidate is left out on that item. "+
		"Items not presented, or lost through a technical fault, count nowhere. "+emptyWords(p.Missing)+missingCodes(r), term)
	r.entry("Attempts", capitalized(attemptWords(p.Attempts))+" count.", term)
	r.entry("Seed", fmt.Sprintf("%d, for anything random.", p.Seed), term)

	r.heading("Sources", 20)
	for _, ref := range references {
		if ref.methods == nil || slices.ContainsFunc(ref.methods, func(id string) bool { return slices.Contains(p.Methods, id) }) {
			r.paragraph(ref.text, small)
			r.space(0.5)
		}
	}
}

// matchedOn is a matching variable and the comparisons, from 1, that use it.
type matchedOn struct {
	variable    string
	comparisons []int
}

func (m matchedOn) where() string {
	var numbers []string
	for _, n := range m.comparisons {
		numbers = append(numbers, fmt.Sprint(n))
	}
	if len(numbers) == 1 {
		return "comparison " + numbers[0]
	}
	return "comparisons " + list(numbers, 40)
}

// matchingVariables returns the matching variables of the comparisons in order of first
// use; that of the plan where there is no comparison.
func (r *report) matchingVariables() []matchedOn {
	var out []matchedOn
	for i := range r.x.comparisons {
		v := r.x.comparisons[i].Matching.Variable
		k := slices.IndexFunc(out, func(m matchedOn) bool { return m.variable == v })
		if k < 0 {
			k = len(out)
			out = append(out, matchedOn{variable: v})
		}
		out[k].comparisons = append(out[k].comparisons, i+1)
	}
	if len(out) == 0 {
		return []matchedOn{{variable: r.x.plan.Matching.Variable}}
	}
	return out
}

// refinementText says how the matching score was refined. An external score holds no
// item that could leave it.
func (r *report) refinementText(variables []matchedOn) string {
	planned := purificationWords(r.x.plan.Matching.Purification)
	k := slices.IndexFunc(variables, func(m matchedOn) bool { return m.variable == dif.MatchExternal })
	if k < 0 {
		return planned
	}
	const external = "One stage: no item is part of the external score, so none can leave it, and there is no refinement."
	if len(variables) == 1 {
		return external
	}
	return fmt.Sprintf("In %s: %s In the others: %s", variables[k].where(), external, planned)
}

func yesNo(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}

func capitalized(s string) string {
	if s == "" {
		return s
	}
	return strings.ToUpper(s[:1]) + s[1:]
}

// missingCodes lists the declared codes of missing answers.
func missingCodes(r *report) string {
	m := r.x.plan.Missing
	var parts []string
	for _, k := range []struct {
		name  string
		codes []string
	}{
		{"omitted", m.Omitted}, {"not reached", m.NotReached}, {"invalid", m.Invalid}, {"technical fault", m.Technical}, {"not presented", m.NotPresented},
	} {
		if len(k.codes) > 0 {
			parts = append(parts, k.name+": "+list(k.codes, 12))
		}
	}
	if len(parts) == 0 {
		return ""
	}
	return " Codes: " + strings.Join(parts, "; ") + "."
}
