package dif

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
)

// Options are the things of a run that do not change its outcome.
type Options struct {
	Workers int // goroutines; 0 means 1
	// Progress, when set, is told what is being done and how far it is. Calls do not overlap.
	Progress func(stage string, done, total int)
}

// ErrInput marks plans that cannot be carried out on the data they were given.
var ErrInput = errors.New("plan and data do not fit")

// Run audits the data under the plan. The same plan and data give the same evidence,
// whatever the number of workers. An error wraps ErrInput when plan or data are at
// fault, ctx.Err() when the run was cancelled; otherwise it is a fault of the program.
// Data is not changed.
func Run(ctx context.Context, plan Plan, data *Data, options Options) (*Evidence, error) {
	if errs := plan.Validate(); len(errs) > 0 {
		return nil, fmt.Errorf("%w: %w", ErrInput, errors.Join(errs...))
	}
	plan = plan.complete()
	if err := data.check(); err != nil {
		return nil, fmt.Errorf("check data: %w", err)
	}
	if data.Candidates() == 0 {
		return nil, fmt.Errorf("%w: no candidate is left to analyse", ErrInput)
	}
	if len(data.Items) == 0 {
		return nil, fmt.Errorf("%w: there are no items", ErrInput)
	}
	r := &runner{plan: plan, data: data, workers: max(1, options.Workers), progress: options.Progress, groupings: map[string]*groupingCodes{}}
	return r.run(ctx)
}

// runner carries one run.
type runner struct {
	plan     Plan
	data     *Data
	workers  int
	progress func(stage string, done, total int)

	groupings   map[string]*groupingCodes
	comparisons []labelled
	variable    string
	packed      *packed
	matching    []int // items of the stage-1 score
	summaries   []Comparison
	done        int
}

func (r *runner) tell(stage string, done, total int) {
	if r.progress != nil {
		r.progress(stage, done, total)
	}
}

func (r *runner) run(ctx context.Context) (*Evidence, error) {
	var names []string
	for _, c := range r.plan.Comparisons {
		if _, ok := r.groupings[c.Grouping]; ok {
			continue
		}
		g, err := r.data.grouping(c.Grouping)
		if err != nil {
			return nil, fmt.Errorf("%w: %w", ErrInput, err)
		}
		r.groupings[c.Grouping] = g
		names = append(names, c.Grouping)
	}
	var err error
	if r.comparisons, err = r.plan.expand(r.groupings); err != nil {
		return nil, fmt.Errorf("%w: %w", ErrInput, err)
	}
	e := r.evidence()
	r.tell("score", 0, 1)
	if err := r.prepare(ctx); err != nil {
		return nil, err
	}
	r.tell("score", 1, 1)
	r.excludeWithoutScore(e)
	r.summaries = make([]Comparison, len(r.comparisons))
	for _, name := range names {
		labels := r.countLabels(r.groupings[name])
		e.Inputs.Groupings = append(e.Inputs.Groupings, labels)
		if err := r.auditGrouping(ctx, name, labels.NotStated); err != nil {
			return nil, err
		}
	}
	e.Comparisons = r.summaries
	return e, nil
}

// evidence returns the document with everything that does not need statistics.
func (r *runner) evidence() *Evidence {
	e := &Evidence{
		Schema: Schema,
		Engine: Engine{Version: EngineVersion},
		Plan:   r.plan,
		Notice: "Internal: holds counts of small groups. Not for publication; reports merge or withhold them.",
	}
	in := &e.Inputs
	in.DataSHA256 = r.data.Digest(r.plan.UsedGroupings())
	in.Sources = append([]Source{}, r.data.Sources...)
	in.CandidatesReceived = r.data.Received
	in.CandidatesAnalysed = r.data.Candidates()
	in.Exclusions = append([]Exclusion{}, r.data.Exclusions...)
	in.Warnings = append([]Warning{}, r.data.Warnings...)
	in.Items = []ItemSummary{}
	for _, it := range r.data.Items {
		in.Items = append(in.Items, ItemSummary{it.ID, it.Version, it.Role, it.MaxScore, it.ContentArea})
	}
	return e
}

// ExcludedNoExternalScore is the reason of candidates without the external score they
// were to be matched on.
const ExcludedNoExternalScore = "no_external_score"

// excludeWithoutScore counts the candidates who leave because they have no external score.
func (r *runner) excludeWithoutScore(e *Evidence) {
	if r.variable != MatchExternal {
		return
	}
	missing := func(c int) bool { return !r.analysed(c) }
	total := 0
	for c := range r.data.External {
		if missing(c) {
			total++
		}
	}
	if total == 0 {
		return
	}
	e.Inputs.CandidatesAnalysed -= total
	e.Inputs.Exclusions = append(e.Inputs.Exclusions, Exclusion{Reason: ExcludedNoExternalScore, Count: total})
	for _, name := range r.plan.UsedGroupings() {
		g, err := r.data.grouping(name)
		if err != nil {
			continue // every used grouping was found before
		}
		counts := make([]int, len(g.labels)+1)
		for c, code := range g.codes {
			if missing(c) {
				counts[code+1]++
			}
		}
		for code, n := range counts {
			if n == 0 {
				continue
			}
			x := Exclusion{Reason: ExcludedNoExternalScore, Grouping: text(name), Count: n}
			if code > 0 {
				x.Label = text(g.labels[code-1])
			}
			e.Inputs.Exclusions = append(e.Inputs.Exclusions, x)
		}
	}
}

// analysed reports whether a candidate has what matching needs.
func (r *runner) analysed(c int) bool {
	return r.variable != MatchExternal || !math.IsNaN(r.data.External[c])
}

// countLabels counts the analysed candidates of a grouping by label.
func (r *runner) countLabels(g *groupingCodes) GroupingCount {
	out := GroupingCount{Grouping: g.name, Labels: make([]LabelCount, len(g.labels))}
	for i, label := range g.labels {
		out.Labels[i].Label = label
	}
	for c, code := range g.codes {
		switch {
		case !r.analysed(c):
		case code < 0:
			out.NotStated++
		default:
			out.Labels[code].N++
		}
	}
	return out
}

// auditGrouping carries out every comparison of one grouping: one counting pass over
// all its groups for the first stage, then one pass per comparison over its two groups
// for the second, shared where the same items were dropped.
func (r *runner) auditGrouping(ctx context.Context, name string, notStated int) error {
	codes := r.groupings[name]
	group := map[string]int{}
	var groups []int
	for _, c := range r.comparisons {
		for _, label := range []string{c.reference, c.focal} {
			if _, ok := group[label]; !ok && c.grouping == name {
				groups = append(groups, len(group))
				group[label] = len(group)
			}
		}
	}
	if len(group) > math.MaxInt16 {
		return fmt.Errorf("%w: grouping %s has more groups than can be compared in one audit (%d)", ErrInput, name, math.MaxInt16)
	}
	of := make([]int16, r.data.Candidates())
	noScore := make([]int, len(group))
	for c, code := range codes.codes {
		of[c] = -1
		if code < 0 {
			continue
		}
		if g, ok := group[codes.labels[code]]; !ok {
			continue
		} else if r.analysed(c) {
			of[c] = int16(g)
		} else {
			noScore[g]++
		}
	}
	a := r.packed.arrange(of, len(group))
	t := &tabulator{arrangement: a, workers: r.workers}
	if r.variable == MatchExternal {
		t.external = make([]float64, len(a.order))
		for i, c := range a.order {
			t.external[i] = r.data.External[c] + 0 // + 0: both zeros are one level
		}
	}
	first, err := t.tabulate(ctx, r.packed.mask(func(i int) bool { return slices.Contains(r.matching, i) }), groups)
	if err != nil {
		return fmt.Errorf("count %s: %w", name, err)
	}
	for i, c := range r.comparisons {
		if c.grouping != name {
			continue
		}
		k := &comparing{runner: r, tabulator: t, groups: [2]int{group[c.reference], group[c.focal]}}
		k.first = first.pair(a, k.groups)
		k.noScore = [2]int{noScore[k.groups[0]], noScore[k.groups[1]]}
		if err := k.compare(ctx, c); err != nil {
			return fmt.Errorf("compare %s %s/%s: %w", c.grouping, c.reference, c.focal, err)
		}
		if k.reported != k.first && len(a.sets) > 100 {
			t.forget(k.reported.tabulation) // large, and hardly ever the score of another comparison too
		}
		k.out.Groups.NotStated = notStated
		k.warn()
		r.summaries[i] = k.out
		r.done++
		r.tell("compare", r.done, len(r.comparisons))
	}
	return nil
}
