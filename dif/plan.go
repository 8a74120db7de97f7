package dif

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// Values a plan may hold for its matching and attempts keys.
const (
	MatchAuto            = "auto"
	MatchTotal           = "total"
	MatchTotalWithinForm = "total_within_form"
	MatchExternal        = "external"
	// MatchTotalWithinSet is what MatchAuto becomes where candidates were presented
	// different items; it stands in evidence, never in a plan.
	MatchTotalWithinSet = "total_within_set"

	LevelsThin  = "thin"
	LevelsThick = "thick"

	PurifyNone      = "none"
	PurifyTwoStage  = "two_stage"
	PurifyIterative = "iterative"

	AttemptsFirst = "first"
	AttemptsLast  = "last"
	AttemptsAll   = "all"

	EmptyNotPresented = "not_presented"
	EmptyOmitted      = "omitted"
	EmptyByPosition   = "by_position"

	// FocalEach stands for every label of a grouping but the reference.
	FocalEach = "each"
	// SeveralNotStated counts a candidate with several labels as not stated.
	SeveralNotStated = "not_stated"
)

// Plan says what is tested and how. It is locked before the audit runs and stands
// whole, defaults filled in, in the evidence. Start from DefaultPlan, since zero is
// a meaningful value of several criteria.
type Plan struct {
	Title       string                  `json:"title"`
	Comparisons []PlannedComparison     `json:"comparisons"`
	Groupings   map[string]GroupingRule `json:"groupings"`
	Columns     Columns                 `json:"columns"`
	Methods     []string                `json:"methods"` // ids of Methods, in report order; empty means all
	Matching    MatchingRule            `json:"matching"`
	Missing     MissingRule             `json:"missing"`
	Attempts    string                  `json:"attempts"`
	Criteria    Criteria                `json:"criteria"`
	Seed        int64                   `json:"seed"`
}

// PlannedComparison names one grouping, its reference label and a focal label, or
// FocalEach. A crossing of groupings is written "sex+first_language", its labels "f+home".
type PlannedComparison struct {
	Grouping  string `json:"grouping"`
	Reference string `json:"reference"`
	Focal     string `json:"focal"`
}

// GroupingRule declares the labels of a grouping. Without Labels every label seen is valid.
type GroupingRule struct {
	Labels    []string `json:"labels"`
	NotStated []string `json:"not_stated"` // codes that mean the same as an empty cell
	Several   string   `json:"several"`    // SeveralNotStated, a label, or empty: several labels are refused
}

// Columns declares response-file columns that are not items.
type Columns struct {
	Groupings []string `json:"groupings"`
	Ignore    []string `json:"ignore"`
}

// MatchingRule says on what and how candidates are matched.
type MatchingRule struct {
	Variable     string `json:"variable"`
	Levels       string `json:"levels"`
	Purification string `json:"purification"`
}

// MissingRule lists the codes of each kind of missing answer and what an empty cell means.
type MissingRule struct {
	Empty        string   `json:"empty"` // empty: undeclared
	Omitted      []string `json:"omitted"`
	NotReached   []string `json:"not_reached"`
	Invalid      []string `json:"invalid"`
	Technical    []string `json:"technical"`
	NotPresented []string `json:"not_presented"`
}

// Criteria are the thresholds that turn statistics into a class or a "no verdict".
type Criteria struct {
	Name                 string  `json:"name"`
	ClassAlpha           float64 `json:"class_alpha"`           // level of the test of no difference; the published rule uses .05
	ContinuityCorrection bool    `json:"continuity_correction"` // decide by the corrected chi-square
	MinSmallerGroup      int     `json:"min_smaller_group"`     // candidates in comparable strata
	MinTotal             int     `json:"min_total"`             // both groups together
	FalseDiscovery       float64 `json:"false_discovery"`       // level at which q-values are called significant
}

// DefaultPlan returns a plan without comparisons and with every default. The minima
// are the pre-operational ones of Zwick (2012), ETS RR-12-08.
func DefaultPlan() Plan {
	return Plan{
		Title:     "DIF audit",
		Groupings: map[string]GroupingRule{},
		Matching:  MatchingRule{Variable: MatchAuto, Levels: LevelsThin, Purification: PurifyTwoStage},
		Attempts:  AttemptsFirst,
		Criteria: Criteria{
			Name: "default", ClassAlpha: 0.05,
			MinSmallerGroup: 200, MinTotal: 500, FalseDiscovery: 0.05,
		},
		Seed: 1,
	}
}

// complete returns the plan with method ids in report order and no nil lists or
// maps, so that equal plans have equal bytes. The plan must be valid.
func (p Plan) complete() Plan {
	var ids []string
	for _, m := range Methods() {
		if len(p.Methods) == 0 || slices.Contains(p.Methods, "all") || slices.Contains(p.Methods, m.ID()) {
			ids = append(ids, m.ID())
		}
	}
	p.Methods = ids
	p.Comparisons = slices.Clone(p.Comparisons)
	groupings := make(map[string]GroupingRule, len(p.Groupings))
	for name, g := range p.Groupings {
		g.Labels, g.NotStated = list(g.Labels), list(g.NotStated)
		groupings[name] = g
	}
	p.Groupings = groupings
	p.Columns.Groupings, p.Columns.Ignore = list(p.Columns.Groupings), list(p.Columns.Ignore)
	m := &p.Missing
	m.Omitted, m.NotReached, m.Invalid = list(m.Omitted), list(m.NotReached), list(m.Invalid)
	m.Technical, m.NotPresented = list(m.Technical), list(m.NotPresented)
	return p
}

func list(s []string) []string {
	if s == nil {
		return []string{}
	}
	return slices.Clone(s)
}

// GroupingParts returns the plain groupings a comparison's grouping is crossed from.
func GroupingParts(grouping string) []string { return strings.Split(grouping, "+") }

// UsedGroupings returns the names of all plain groupings the comparisons need, sorted bytewise.
func (p Plan) UsedGroupings() []string {
	var names []string
	for _, c := range p.Comparisons {
		names = append(names, GroupingParts(c.Grouping)...)
	}
	slices.Sort(names)
	return slices.Compact(names)
}

// Validate returns every fault of the plan that can be seen without data, in the
// order of the plan's keys, each naming the key and the values allowed.
func (p Plan) Validate() []error {
	var errs []error
	fault := func(format string, args ...any) { errs = append(errs, fmt.Errorf(format, args...)) }

	if len(p.Comparisons) == 0 {
		fault("comparisons: name at least one comparison (grouping, reference, focal)")
	}
	for i, c := range p.Comparisons {
		at := fmt.Sprintf("comparisons[%d]", i+1)
		switch {
		case c.Grouping == "" || c.Reference == "" || c.Focal == "":
			fault("%s: grouping, reference and focal are all required", at)
			continue
		case c.Reference == c.Focal:
			fault("%s: reference and focal must be different labels", at)
		case slices.Contains(p.Comparisons[:i], c):
			fault("%s: the same comparison stands earlier in the plan", at)
		}
		parts := GroupingParts(c.Grouping)
		sorted := slices.Clone(parts)
		slices.Sort(sorted)
		if slices.Contains(parts, "") || len(slices.Compact(sorted)) != len(parts) {
			fault("%s: a crossing joins different groupings with +", at)
		}
		for _, label := range []string{c.Reference, c.Focal} {
			if len(parts) > 1 && label != FocalEach && len(strings.Split(label, "+")) != len(parts) {
				fault("%s: a label of a crossing has one part per grouping, joined with +", at)
			}
		}
	}
	for name, g := range p.Groupings {
		if g.Several != "" && g.Several != SeveralNotStated && len(g.Labels) > 0 && !slices.Contains(g.Labels, g.Several) {
			fault("groupings.%s.several: use not_stated or one of the declared labels", name)
		}
		for _, l := range g.Labels {
			if slices.Contains(g.NotStated, l) {
				fault("groupings.%s: a label stands under both labels and not_stated", name)
			}
		}
	}
	for _, id := range p.Methods {
		switch {
		case id == "all" || methodByID(id) != nil:
		case slices.Contains(plannedMethods, id):
			fault("methods: %s is not part of this version (it has: %s)", id, strings.Join(methodIDs(), ", "))
		default:
			fault("methods: %q is not a method (this version has: %s)", id, strings.Join(methodIDs(), ", "))
		}
	}
	choice := func(key, value string, later []string, allowed ...string) {
		if slices.Contains(later, value) {
			fault("%s: %s is not part of this version; use %s", key, value, strings.Join(allowed, ", "))
		} else if !slices.Contains(allowed, value) {
			fault("%s: %q is not a value; use %s", key, value, strings.Join(allowed, ", "))
		}
	}
	choice("matching.variable", p.Matching.Variable, nil, MatchAuto, MatchTotal, MatchTotalWithinForm, MatchExternal)
	choice("matching.levels", p.Matching.Levels, []string{LevelsThick}, LevelsThin)
	choice("matching.purification", p.Matching.Purification, []string{PurifyIterative}, PurifyNone, PurifyTwoStage)
	if p.Missing.Empty != "" {
		choice("missing.empty", p.Missing.Empty, nil, EmptyNotPresented, EmptyOmitted, EmptyByPosition)
	}
	kindOf := map[string]string{}
	for _, kind := range []struct {
		name  string
		codes []string
	}{
		{"omitted", p.Missing.Omitted}, {"not_reached", p.Missing.NotReached}, {"invalid", p.Missing.Invalid},
		{"technical", p.Missing.Technical}, {"not_presented", p.Missing.NotPresented},
	} {
		for _, code := range kind.codes {
			switch other, twice := kindOf[code]; {
			case code == "":
				fault("missing.%s: an empty code is declared by missing.empty", kind.name)
			case twice && other != kind.name:
				fault("missing: code %q stands under both %s and %s", code, other, kind.name)
			}
			kindOf[code] = kind.name
		}
	}
	choice("attempts", p.Attempts, nil, AttemptsFirst, AttemptsLast, AttemptsAll)
	share := func(key string, v float64) {
		if !(v > 0 && v < 1) || math.IsInf(v, 0) {
			fault("criteria.%s: give a number between 0 and 1", key)
		}
	}
	share("class_alpha", p.Criteria.ClassAlpha)
	share("false_discovery", p.Criteria.FalseDiscovery)
	if p.Criteria.MinSmallerGroup < 0 || p.Criteria.MinTotal < 0 {
		fault("criteria: minima are counts of candidates, 0 or more")
	}
	return errs
}
