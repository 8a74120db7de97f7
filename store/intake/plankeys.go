package intake

import (
	"fmt"
	"slices"
	"strconv"

	"difaudit/dif"
)

// planKeys are the readers of the keys of one mapping.
type planKeys = map[string]func(n *planNode, path string)

// read reads the whole plan.
func (p *planReader) read(root *planNode) {
	plan := &p.plan
	p.fields(root, "", planKeys{
		"title":       p.text(&plan.Title),
		"comparisons": p.comparisons,
		"groupings":   p.groupings,
		"columns": p.mapping(planKeys{
			"groupings": p.texts(&plan.Columns.Groupings),
			"ignore":    p.texts(&plan.Columns.Ignore),
		}),
		"methods": p.methods,
		"matching": p.mapping(planKeys{
			"variable":     p.text(&plan.Matching.Variable),
			"levels":       p.text(&plan.Matching.Levels),
			"purification": p.text(&plan.Matching.Purification),
		}),
		"irt": func(n *planNode, path string) {
			p.fault(p.lines[path], "irt: item response models are not part of this version; remove the key")
		},
		"missing": p.mapping(planKeys{
			"empty":         p.text(&plan.Missing.Empty),
			"omitted":       p.texts(&plan.Missing.Omitted),
			"not_reached":   p.texts(&plan.Missing.NotReached),
			"invalid":       p.texts(&plan.Missing.Invalid),
			"technical":     p.texts(&plan.Missing.Technical),
			"not_presented": p.texts(&plan.Missing.NotPresented),
		}),
		"attempts": p.text(&plan.Attempts),
		"criteria": p.mapping(planKeys{
			"name":                  p.text(&plan.Criteria.Name),
			"class_alpha":           p.number(&plan.Criteria.ClassAlpha),
			"continuity_correction": p.truth(&plan.Criteria.ContinuityCorrection),
			"min_smaller_group":     p.count(&plan.Criteria.MinSmallerGroup),
			"min_total":             p.count(&plan.Criteria.MinTotal),
			"false_discovery":       p.number(&plan.Criteria.FalseDiscovery),
		}),
		"seed": parsed(p, &plan.Seed, "a whole number", func(s string) (int64, error) { return strconv.ParseInt(s, 10, 64) }),
	})
}

// mapping reads a mapping with known keys.
func (p *planReader) mapping(known planKeys) func(*planNode, string) {
	return func(n *planNode, path string) { p.fields(n, path, known) }
}

func (p *planReader) comparisons(n *planNode, path string) {
	if n.kind != listNode {
		p.fault(n.line, "%s is a list of {grouping, reference, focal}", path)
		return
	}
	for i := range n.list {
		var c dif.PlannedComparison
		at := fmt.Sprintf("%s[%d]", path, i+1)
		p.lines[at] = n.list[i].line
		p.fields(&n.list[i], at, planKeys{
			"grouping": p.text(&c.Grouping), "reference": p.text(&c.Reference), "focal": p.text(&c.Focal),
		})
		p.plan.Comparisons = append(p.plan.Comparisons, c)
	}
}

func (p *planReader) groupings(n *planNode, path string) {
	if n.kind != mappingNode {
		p.fault(n.line, "%s holds the name of each grouping with its rule", path)
		return
	}
	for i := range n.fields {
		f := &n.fields[i]
		var rule dif.GroupingRule
		at := path + "." + f.name
		p.lines[at] = f.line
		p.fields(&f.value, at, planKeys{
			"labels": p.texts(&rule.Labels), "not_stated": p.texts(&rule.NotStated), "several": p.text(&rule.Several),
		})
		p.plan.Groupings[f.name] = rule
	}
}

// methods reads a list of method ids, or all.
func (p *planReader) methods(n *planNode, path string) {
	if n.kind == scalarNode && n.text == "all" {
		p.plan.Methods = nil
		return
	}
	if n.kind == scalarNode {
		p.fault(n.line, "%s is a list of method ids, or all", path)
		return
	}
	p.texts(&p.plan.Methods)(n, path)
}

func sortedNames(keys planKeys) []string {
	names := make([]string, 0, len(keys))
	for name := range keys {
		names = append(names, name)
	}
	slices.Sort(names)
	return names
}
