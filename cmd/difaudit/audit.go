package main

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"flag"
	"fmt"
	"io"
	"runtime"
	"strconv"
	"strings"
	"time"

	"difaudit/dif"
	"difaudit/reports"
	"difaudit/store/intake"
)

// auditOptions are the options of the command.
type auditOptions struct {
	inputs         inputFiles
	plan           string
	evidence       string
	report         string
	csv            string
	reportDate     string
	administration string
	workers        int
	over           planOptions
}

// inputFiles are the paths of the data.
type inputFiles struct{ responses, items, forms, candidates string }

func (f *inputFiles) options(set *flag.FlagSet) {
	set.StringVar(&f.responses, "responses", "", "`FILE`: the answers, one row per candidate, or per candidate and item; - is standard input (required)")
	set.StringVar(&f.items, "items", "", "`FILE`: the items with keys, options, maximum scores, roles")
	set.StringVar(&f.forms, "forms", "", "`FILE`: the items of each form in order")
	set.StringVar(&f.candidates, "candidates", "", "`FILE`: group labels by candidate")
}

func (f *inputFiles) paths() []string { return []string{f.responses, f.items, f.forms, f.candidates} }

// planOptions are options that take the place of keys of the plan.
type planOptions struct {
	apply []func(p *dif.Plan) error
}

// parseAudit reads the options. An option over the plan is applied only when given.
func parseAudit(args []string) (*auditOptions, *flag.FlagSet, error) {
	o := &auditOptions{}
	f := newFlags("audit")
	o.inputs.options(f)
	f.StringVar(&o.plan, "plan", "", "`FILE`: the audit plan, YAML or JSON")
	f.StringVar(&o.evidence, "evidence", "", "`FILE`: write the evidence here, JSON; - is standard output")
	f.StringVar(&o.report, "report", "", "`FILE`: write the report here, PDF")
	f.StringVar(&o.csv, "csv", "", "`FILE`: write the findings here, CSV")
	f.StringVar(&o.reportDate, "report-date", "", "`YYYY-MM-DD`: the date printed on the report; default SOURCE_DATE_EPOCH, else today (UTC)")
	f.StringVar(&o.administration, "administration", "", "`ID`: your name of the sitting, kept in the evidence")
	f.IntVar(&o.workers, "workers", runtime.NumCPU(), "`N`: number of goroutines; the outcome does not depend on it")

	over := func(name, usage string, apply func(p *dif.Plan, v string) error) {
		f.Func(name, usage, func(v string) error {
			o.over.apply = append(o.over.apply, func(p *dif.Plan) error { return apply(p, v) })
			return nil
		})
	}
	first := true
	over("comparison", "`G:REF:FOCAL`: grouping, reference label and focal label, or each; repeatable", func(p *dif.Plan, v string) error {
		parts := strings.Split(v, ":")
		if len(parts) != 3 {
			return fmt.Errorf("--comparison %q: write GROUPING:REFERENCE:FOCAL", v)
		}
		if first {
			p.Comparisons, first = nil, false
		}
		p.Comparisons = append(p.Comparisons, dif.PlannedComparison{Grouping: parts[0], Reference: parts[1], Focal: parts[2]})
		return nil
	})
	text := func(name, usage string, field func(p *dif.Plan) *string) {
		over(name, usage, func(p *dif.Plan, v string) error { *field(p) = v; return nil })
	}
	list := func(name, usage string, field func(p *dif.Plan) *[]string) {
		over(name, usage, func(p *dif.Plan, v string) error { *field(p) = commaList(v); return nil })
	}
	count := func(name, usage string, field func(p *dif.Plan) *int) {
		over(name, usage, func(p *dif.Plan, v string) error {
			n, err := strconv.Atoi(v)
			if err != nil {
				return fmt.Errorf("--%s %q: give a whole number", name, v)
			}
			*field(p) = n
			return nil
		})
	}
	list("groupings", "`LIST`: columns that are groupings", func(p *dif.Plan) *[]string { return &p.Columns.Groupings })
	list("ignore", "`LIST`: columns to ignore", func(p *dif.Plan) *[]string { return &p.Columns.Ignore })
	list("methods", "`LIST`: method ids, or all", func(p *dif.Plan) *[]string { return &p.Methods })
	text("matching", "`V`: matching variable: auto, total, total_within_form, external", func(p *dif.Plan) *string { return &p.Matching.Variable })
	text("levels", "`V`: score levels: thin", func(p *dif.Plan) *string { return &p.Matching.Levels })
	text("purification", "`V`: refinement of the matching score: none, two_stage", func(p *dif.Plan) *string { return &p.Matching.Purification })
	text("empty", "`V`: what an empty cell means: not_presented, omitted, by_position", func(p *dif.Plan) *string { return &p.Missing.Empty })
	list("omitted", "`CODES`: codes of omitted answers", func(p *dif.Plan) *[]string { return &p.Missing.Omitted })
	list("not-reached", "`CODES`: codes of items not reached", func(p *dif.Plan) *[]string { return &p.Missing.NotReached })
	count("min-smaller-group", "`N`: least number of candidates in the smaller group for a letter", func(p *dif.Plan) *int { return &p.Criteria.MinSmallerGroup })
	count("min-total", "`N`: least number of candidates in both groups for a letter", func(p *dif.Plan) *int { return &p.Criteria.MinTotal })
	for _, later := range []string{"model", "anchors"} {
		over(later, "`V`: not part of this version; belongs to the likelihood-ratio test", func(*dif.Plan, string) error {
			return fmt.Errorf("--%s is not part of this version: it belongs to the likelihood-ratio test", later)
		})
	}
	if err := parseFlags(f, args, "comparison"); err != nil {
		return nil, f, err
	}
	switch {
	case f.NArg() > 0:
		return nil, f, fmt.Errorf("%q is not an option; name files with --responses, --items, --forms, --candidates", f.Arg(0))
	case o.inputs.responses == "":
		return nil, f, errors.New("--responses is required: name the file with the answers")
	case o.workers < 1:
		return nil, f, errors.New("--workers: give a number of at least 1")
	}
	stdin := 0
	for _, p := range append(o.inputs.paths(), o.plan) {
		if p == "-" {
			stdin++
		}
	}
	if stdin > 1 {
		return nil, f, errors.New("only one input can be standard input")
	}
	return o, f, nil
}

// readPlan reads the plan file, if any, and applies the options over it.
func (o *auditOptions) readPlan(env environment) (dif.Plan, error) {
	plan := dif.DefaultPlan()
	if o.plan != "" {
		r, name, err := env.openInput(o.plan)
		if err != nil {
			return plan, err
		}
		defer r.Close()
		if plan, err = intake.ReadPlan(name, r); err != nil {
			return plan, err
		}
	}
	for _, apply := range o.over.apply {
		if err := apply(&plan); err != nil {
			return plan, err
		}
	}
	return plan, errors.Join(plan.Validate()...)
}

// read opens and reads the data.
func (f *inputFiles) read(ctx context.Context, env environment, plan dif.Plan, administration string, rows func(int)) (*intake.Result, error) {
	req := intake.Request{Plan: plan, Administration: administration, Progress: rows}
	for _, in := range []struct {
		path string
		to   **intake.File
	}{{f.responses, &req.Responses}, {f.items, &req.Items}, {f.forms, &req.Forms}, {f.candidates, &req.Candidates}} {
		if in.path == "" {
			continue
		}
		r, name, err := env.openInput(in.path)
		if err != nil {
			return nil, err
		}
		defer r.Close()
		*in.to = &intake.File{Name: name, Reader: r}
	}
	return intake.Read(ctx, req)
}

// reportTime returns the date printed on the report.
func (o *auditOptions) reportTime(env environment) (time.Time, error) {
	if o.reportDate != "" {
		t, err := time.Parse(time.DateOnly, o.reportDate)
		if err != nil || t.Year() < 1 {
			return t, fmt.Errorf("--report-date %q: write YYYY-MM-DD", o.reportDate)
		}
		return t, nil
	}
	t := env.now()
	if epoch := env.getenv("SOURCE_DATE_EPOCH"); epoch != "" {
		seconds, err := strconv.ParseInt(epoch, 10, 64)
		if err != nil {
			return t, fmt.Errorf("SOURCE_DATE_EPOCH %q: give seconds since 1970", epoch)
		}
		t = time.Unix(seconds, 0)
		if year := t.UTC().Year(); year < 1 || year > 9999 {
			return t, fmt.Errorf("SOURCE_DATE_EPOCH %q lies outside the years 1 to 9999", epoch)
		}
	}
	return t.UTC().Truncate(24 * time.Hour), nil
}

// runAudit audits files.
func runAudit(ctx context.Context, args []string, env environment) int {
	o, flags, err := parseAudit(args)
	if errors.Is(err, flag.ErrHelp) {
		fmt.Fprintln(env.stdout, "difaudit audit --responses FILE --comparison GROUPING:REFERENCE:FOCAL [options]\n\nOptions:")
		printOptions(env.stdout, flags)
		return statusDone
	}
	bad := func(err error) int {
		fmt.Fprintf(env.stderr, "difaudit audit: %v\n", err)
		return statusBadInput
	}
	if err != nil {
		return bad(fmt.Errorf("%w\nOptions: difaudit audit --help", err))
	}
	plan, err := o.readPlan(env)
	if err != nil {
		return bad(err)
	}
	date, err := o.reportTime(env)
	if err != nil {
		return bad(err)
	}
	var evidence *dif.Evidence
	var encoded []byte
	out := outputs{stdout: env.stdout}
	out.add("--evidence", o.evidence, 0o600, func(w io.Writer) error { _, err := w.Write(encoded); return err })
	out.add("--report", o.report, 0o666, func(w io.Writer) error {
		return reports.WritePDF(w, evidence, reports.Options{Date: date, EvidenceSHA256: digest(encoded)})
	})
	out.add("--csv", o.csv, 0o666, func(w io.Writer) error { return reports.WriteCSV(w, evidence) })
	if err := out.check(append(o.inputs.paths(), o.plan)); err != nil {
		return bad(err)
	}

	bar := newProgress(env.stderr)
	result, err := o.inputs.read(ctx, env, plan, o.administration, bar.rows)
	bar.end()
	if status, failed := readFailed(ctx, "audit", err, env); failed {
		return status
	}
	for _, note := range result.Notes {
		fmt.Fprintln(env.stderr, note)
	}
	if err := result.Problems.Print(env.stderr); err != nil {
		return statusInternal
	}
	evidence, err = dif.Run(ctx, plan, result.Data, dif.Options{Workers: o.workers, Progress: bar.step})
	bar.end()
	switch {
	case errors.Is(err, dif.ErrInput):
		return bad(err)
	case ctx.Err() != nil:
		fmt.Fprintln(env.stderr, "difaudit audit: interrupted; nothing was written.")
		return statusInternal
	case err != nil:
		fmt.Fprintf(env.stderr, "difaudit audit: %v\n", err)
		return statusInternal
	}
	if encoded, err = evidence.Encode(); err != nil {
		fmt.Fprintf(env.stderr, "difaudit audit: %v\n", err)
		return statusInternal
	}
	table := env.stdout
	if out.toStdout() {
		table = env.stderr
	}
	if err := out.write(func() error { return reports.WriteTable(table, evidence) }); err != nil {
		fmt.Fprintf(env.stderr, "difaudit audit: %v.\n", err)
		return statusInternal
	}
	for _, t := range out.targets {
		if t.path != "-" {
			fmt.Fprintf(env.stderr, "Wrote %s\n", t.path)
		}
	}
	if evidence.FitFailed() {
		return statusFitFailed
	}
	return statusDone
}

// readFailed prints why the data could not be read.
func readFailed(ctx context.Context, command string, err error, env environment) (status int, failed bool) {
	var problems *intake.Problems
	switch {
	case err == nil:
		return 0, false
	case errors.As(err, &problems):
		fmt.Fprintf(env.stderr, "difaudit %s: the data cannot be used as they are; nothing was written.\n", command)
		if err := problems.Print(env.stderr); err != nil {
			return statusInternal, true
		}
	case ctx.Err() != nil:
		fmt.Fprintf(env.stderr, "difaudit %s: interrupted; nothing was written.\n", command)
		return statusInternal, true
	default:
		fmt.Fprintf(env.stderr, "difaudit %s: %v\n", command, err)
	}
	return statusBadInput, true
}

func digest(b []byte) string {
	sum := sha256.Sum256(b)
	return hex.EncodeToString(sum[:])
}
