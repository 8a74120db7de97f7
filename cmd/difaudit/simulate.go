package main

import (
	"bufio"
	"compress/gzip"
	"context"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"

	"difaudit/dif/simulate"
)

// runSimulate writes responses under a stated model with planted DIF, and the truth
// beside them. The status is 0 when the files are written, 2 for bad usage with
// nothing written, 3 when writing fails.
func runSimulate(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	o, err := parseSimulate(args, stdout)
	switch {
	case errors.Is(err, flag.ErrHelp):
		return 0
	case err != nil:
		return simulateFailed(stderr, err)
	}
	design, err := o.design()
	if err != nil {
		return simulateFailed(stderr, err)
	}
	s, err := simulate.New(design)
	if err != nil {
		return simulateFailed(stderr, err)
	}
	if err := o.checkTargets(); err != nil {
		return simulateFailed(stderr, err)
	}
	if err := o.write(ctx, s); err != nil {
		if ctx.Err() != nil {
			err = errors.New("interrupted; nothing was written")
		}
		fmt.Fprintf(stderr, "difaudit simulate: %v\n", err)
		return 3
	}
	o.report(stdout, s)
	return 0
}

func simulateFailed(stderr io.Writer, err error) int {
	fmt.Fprintf(stderr, "difaudit simulate: %v\nOptions: difaudit simulate --help\n", err)
	return 2
}

// simulateOptions are the options of the command.
type simulateOptions struct {
	out           string
	model         string
	candidates    string
	labels        string
	grouping      string
	impact        float64
	items         int
	pretest       int
	dif           []plantedItems
	slopeDIF      []plantedItems
	raw           bool
	options       int
	omitShare     float64
	notReached    float64
	external      float64
	candidateFile bool
	seed          int64
	gzip          bool
	force         bool
}

// plantedItems is one use of --dif or --slope-dif.
type plantedItems struct {
	text  string // as typed
	items []int  // numbers, from 1
	shift float64
}

// parseSimulate reads the options; the error is flag.ErrHelp after the help text was
// asked for and printed.
func parseSimulate(args []string, stdout io.Writer) (*simulateOptions, error) {
	o := &simulateOptions{}
	f := flag.NewFlagSet("simulate", flag.ContinueOnError)
	f.SetOutput(io.Discard)
	f.StringVar(&o.out, "out", "", "`DIR` to write the files to; made when missing (required)")
	f.StringVar(&o.model, "model", string(simulate.TwoPL), "item response `MODEL`: rasch, 2pl or 3pl")
	f.StringVar(&o.candidates, "candidates", "1000:500", "numbers of candidates, `REFERENCE:FOCAL`")
	f.StringVar(&o.labels, "labels", "reference:focal", "labels of the two groups, `REFERENCE:FOCAL`")
	f.StringVar(&o.grouping, "grouping", "group", "`NAME` of the grouping")
	f.Float64Var(&o.impact, "impact", 0, "mean ability of the focal group as a `NUMBER` of standard deviations; the reference group has 0")
	f.IntVar(&o.items, "items", 40, "`NUMBER` of items")
	f.IntVar(&o.pretest, "pretest", 0, "`NUMBER` of items, the last ones, that are pretest items")
	f.Func("dif", "plant a difference in difficulty, `ITEMS:DELTA`, as 3:-2.0 or 7,8:1.5: item numbers and D-DIF, negative when harder for the focal group (repeatable)", planted(&o.dif))
	f.Func("slope-dif", "plant a difference in slope, `ITEMS:SHIFT`, as 5:-0.4: added to the slope in the focal group (repeatable)", planted(&o.slopeDIF))
	f.BoolVar(&o.raw, "raw", false, "write the options chosen, with keys in the items file, instead of scores")
	f.IntVar(&o.options, "options", 4, "`NUMBER` of options of an item, with --raw")
	f.Float64Var(&o.omitShare, "omit-share", 0, "expected `SHARE` of wrong answers left blank, among all answers reached")
	f.Float64Var(&o.notReached, "not-reached-share", 0, "expected `SHARE` of all answers that is not reached, at most 0.25")
	f.Float64Var(&o.external, "external", 0, "add an external score with this `CORRELATION` to ability")
	f.BoolVar(&o.candidateFile, "candidates-file", false, "write the group labels to candidates.csv instead of into the responses")
	f.Int64Var(&o.seed, "seed", 1, "whole `NUMBER`; the same seed and options give the same files")
	f.BoolVar(&o.gzip, "gzip", false, "compress the files that have a row for each candidate")
	f.BoolVar(&o.force, "force", false, "overwrite the files of an earlier run")
	if err := parseFlags(f, args, "dif", "slope-dif"); err != nil {
		if errors.Is(err, flag.ErrHelp) {
			simulateHelp(stdout, f)
		}
		return nil, err
	}
	optionsGiven := false
	f.Visit(func(g *flag.Flag) { optionsGiven = optionsGiven || g.Name == "options" })
	switch {
	case f.NArg() > 0:
		return nil, fmt.Errorf("%q is no option: every value follows an option, such as --out DIR", f.Arg(0))
	case o.out == "":
		return nil, errors.New("no directory to write to: add --out DIR")
	case optionsGiven && !o.raw:
		return nil, errors.New("--options needs --raw: scored answers have no options")
	}
	return o, nil
}

func simulateHelp(w io.Writer, f *flag.FlagSet) {
	fmt.Fprint(w, "difaudit simulate --out DIR [options]\n\n"+
		"Writes responses.csv, items.csv and truth.json for an invented exam.\n\n")
	f.VisitAll(func(g *flag.Flag) {
		value, usage := flag.UnquoteUsage(g)
		if value != "" {
			value = " " + value
		}
		if g.DefValue != "" && g.DefValue != "0" && g.DefValue != "false" {
			usage += " (default " + g.DefValue + ")"
		}
		fmt.Fprintf(w, "  --%s%s\n        %s\n", g.Name, value, usage)
	})
}

// planted returns the reader of an option ITEMS:SHIFT.
func planted(list *[]plantedItems) func(string) error {
	return func(text string) error {
		numbers, shift, found := strings.Cut(text, ":")
		p := plantedItems{text: text}
		var err error
		if p.shift, err = strconv.ParseFloat(strings.TrimSpace(shift), 64); !found || err != nil {
			return errors.New("give item numbers and a shift, such as 3:-2.0 or 7,8:1.5")
		}
		for n := range strings.SplitSeq(numbers, ",") {
			item, err := strconv.Atoi(strings.TrimSpace(n))
			if err != nil {
				return fmt.Errorf("%q is no item number: give item numbers and a shift, such as 3:-2.0 or 7,8:1.5", n)
			}
			p.items = append(p.items, item)
		}
		*list = append(*list, p)
		return nil
	}
}

// design turns the options into a design; what it cannot judge is left to
// simulate.New.
func (o *simulateOptions) design() (simulate.Design, error) {
	var d simulate.Design
	first, second, found := strings.Cut(o.candidates, ":")
	nR, errR := strconv.Atoi(first)
	nF, errF := strconv.Atoi(second)
	if !found || errR != nil || errF != nil || nR < 1 || nF < 1 {
		return d, fmt.Errorf("--candidates %s: give the numbers of both groups, such as 1000:500", o.candidates)
	}
	reference, focal, found := strings.Cut(o.labels, ":")
	if !found || reference == "" || focal == "" {
		return d, fmt.Errorf("--labels %s: give the labels of both groups, such as reference:focal", o.labels)
	}
	if o.items < 1 {
		return d, fmt.Errorf("--items %d: give at least 1", o.items)
	}
	if o.pretest < 0 || o.pretest >= o.items {
		return d, fmt.Errorf("--pretest %d: with %d items give 0 to %d, so that an operational item is left", o.pretest, o.items, o.items-1)
	}
	d = simulate.Design{
		Model: simulate.Model(o.model), Seed: o.seed, Groupings: []string{o.grouping},
		Groups: []simulate.Group{
			{Labels: []string{reference}, N: nR, Mean: 0, SD: 1},
			{Labels: []string{focal}, N: nF, Mean: o.impact, SD: 1},
		},
		Items:        simulate.NewItems(o.items),
		OmittedShare: o.omitShare, NotReachedShare: o.notReached, ExternalCorrelation: o.external,
	}
	if o.raw {
		d.Options = o.options
		if d.Options == 0 {
			return d, errors.New("--options 0: give at least 2, or leave out --raw")
		}
	}
	for i := o.items - o.pretest; i < o.items; i++ {
		d.Items[i].Role = "pretest"
	}
	if err := plantShifts(d.Items, "--dif", o.dif, func(s *simulate.Shift, v float64) { s.Delta = v }); err != nil {
		return d, err
	}
	return d, plantShifts(d.Items, "--slope-dif", o.slopeDIF, func(s *simulate.Shift, v float64) { s.Slope = v })
}

// plantShifts plants what one option says, and refuses an item named twice by it.
func plantShifts(items []simulate.Item, option string, plans []plantedItems, set func(*simulate.Shift, float64)) error {
	done := map[int]bool{}
	for _, p := range plans {
		for _, n := range p.items {
			switch {
			case n < 1 || n > len(items):
				return fmt.Errorf("%s %s: there is no item %d: name items 1 to %d", option, p.text, n, len(items))
			case done[n]:
				return fmt.Errorf("%s %s: item %d has its shift already: name each item once", option, p.text, n)
			}
			done[n] = true
			item := &items[n-1]
			if item.DIF == nil {
				item.DIF = []simulate.Shift{{Group: 1}}
			}
			set(&item.DIF[0], p.shift)
		}
	}
	return nil
}

// The names of the files, without the ending that compression adds.
const (
	simulatedResponses  = "responses.csv"
	simulatedItems      = "items.csv"
	simulatedCandidates = "candidates.csv"
	simulatedTruth      = "truth.json"
)

// path returns the path of a file; perCandidate tells that it has a row for each.
func (o *simulateOptions) path(name string, perCandidate bool) string {
	if perCandidate && o.gzip {
		name += ".gz"
	}
	return filepath.Join(o.out, name)
}

// targets lists the files to be written.
func (o *simulateOptions) targets() []string {
	list := []string{o.path(simulatedResponses, true), o.path(simulatedItems, false), o.path(simulatedTruth, false)}
	if o.candidateFile {
		list = append(list, o.path(simulatedCandidates, true))
	}
	return list
}

// checkTargets refuses to overwrite files unless asked to, and in any case to leave
// files of an earlier run beside new ones that they do not belong to.
func (o *simulateOptions) checkTargets() error {
	if info, err := os.Stat(o.out); err == nil && !info.IsDir() {
		return fmt.Errorf("--out %s: this is a file: name a directory", o.out)
	}
	targets := o.targets()
	for _, name := range []string{simulatedResponses, simulatedItems, simulatedCandidates, simulatedTruth} {
		for _, path := range []string{filepath.Join(o.out, name), filepath.Join(o.out, name+".gz")} {
			_, err := os.Lstat(path)
			switch {
			case errors.Is(err, fs.ErrNotExist):
			case err != nil:
				return fmt.Errorf("look for earlier files: %w", err)
			case !o.force:
				return fmt.Errorf("%s exists already: name another directory with --out, or overwrite with --force", path)
			case !slices.Contains(targets, path):
				return fmt.Errorf("%s is not among the files to be written and would not belong to them: remove it, or name another directory with --out", path)
			}
		}
	}
	return nil
}

// write writes all files under temporary names and renames them at the end, so that
// a failure leaves no half of a simulation behind.
func (o *simulateOptions) write(ctx context.Context, s *simulate.Simulation) (err error) {
	if err := os.MkdirAll(o.out, 0o777); err != nil {
		return fmt.Errorf("make directory: %w", err)
	}
	var files []*simulatedFile
	defer func() {
		if err != nil {
			for _, f := range files {
				f.discard()
			}
		}
	}()
	create := func(name string, perCandidate bool) (*simulatedFile, error) {
		f, err := createSimulated(o.path(name, perCandidate), perCandidate && o.gzip)
		if err == nil {
			files = append(files, f)
		}
		return f, err
	}

	layout := simulate.NewLayout(s, o.candidateFile)
	items, err := create(simulatedItems, false)
	if err != nil {
		return err
	}
	items.w.Write(layout.Items(nil)) // an error stays in the writer until close
	truth, err := create(simulatedTruth, false)
	if err != nil {
		return err
	}
	encoder := json.NewEncoder(truth.w)
	encoder.SetIndent("", " ")
	encoder.SetEscapeHTML(false)
	if err := encoder.Encode(s.Truth()); err != nil {
		return fmt.Errorf("write %s: %w", truth.path, err)
	}
	responses, err := create(simulatedResponses, true)
	if err != nil {
		return err
	}
	responses.w.Write(layout.ResponsesHeader(nil))
	var people *simulatedFile
	if o.candidateFile {
		if people, err = create(simulatedCandidates, true); err != nil {
			return err
		}
		people.w.Write(layout.CandidatesHeader(nil))
	}
	var row []byte
	n := 0
	for c := range s.Candidates() {
		if n++; n%1000 == 0 && ctx.Err() != nil {
			return ctx.Err()
		}
		row = layout.Responses(row[:0], c)
		if _, err := responses.w.Write(row); err != nil {
			return fmt.Errorf("write %s: %w", responses.path, err)
		}
		if people != nil {
			row = layout.Candidates(row[:0], c)
			people.w.Write(row)
		}
	}
	for _, f := range files {
		if err := f.close(); err != nil {
			return err
		}
	}
	for _, f := range files {
		if err := os.Rename(f.partial, f.path); err != nil {
			return fmt.Errorf("put %s in place: %w", f.path, err)
		}
	}
	return nil
}

// simulatedFile is a file being written under a temporary name.
type simulatedFile struct {
	path, partial string
	file          *os.File
	gzip          *gzip.Writer // nil: not compressed
	w             *bufio.Writer
}

func createSimulated(path string, compress bool) (*simulatedFile, error) {
	f := &simulatedFile{path: path, partial: path + ".partial"}
	var err error
	if f.file, err = os.Create(f.partial); err != nil {
		return nil, fmt.Errorf("create file: %w", err)
	}
	var under io.Writer = f.file
	if compress {
		f.gzip, _ = gzip.NewWriterLevel(f.file, gzip.BestSpeed) // errs for unknown levels only
		under = f.gzip
	}
	f.w = bufio.NewWriterSize(under, 1<<18)
	return f, nil
}

func (f *simulatedFile) close() error {
	err := f.w.Flush()
	if f.gzip != nil && err == nil {
		err = f.gzip.Close()
	}
	if err := errors.Join(err, f.file.Close()); err != nil {
		return fmt.Errorf("write %s: %w", f.path, err)
	}
	return nil
}

func (f *simulatedFile) discard() {
	f.file.Close()
	os.Remove(f.partial)
}

// report says what was written and how to audit it.
func (o *simulateOptions) report(w io.Writer, s *simulate.Simulation) {
	d := s.Design()
	reference, focal := d.Groups[0], d.Groups[1]
	fmt.Fprintf(w, "%d candidates (%d %s, %d %s), %d items, model %s, seed %d\n",
		s.Len(), reference.N, reference.Labels[0], focal.N, focal.Labels[0], len(d.Items), d.Model, d.Seed)
	for _, path := range o.targets() {
		fmt.Fprintf(w, "wrote %s\n", path)
	}
	command := []string{"difaudit", "audit",
		"--responses", o.path(simulatedResponses, true), "--items", o.path(simulatedItems, false)}
	if o.candidateFile {
		command = append(command, "--candidates", o.path(simulatedCandidates, true))
	}
	command = append(command, "--comparison", o.grouping+":"+reference.Labels[0]+":"+focal.Labels[0])
	if s.HasBlanks() {
		command = append(command, "--empty", "by_position")
	}
	if d.ExternalCorrelation > 0 {
		command = append(command, "--matching", "external")
	}
	for i := range command {
		command[i] = shellWord(command[i])
	}
	fmt.Fprintf(w, "\nTo audit them:\n  %s\n", strings.Join(command, " "))
}

// shellWord quotes a word for a POSIX shell where it needs that.
func shellWord(s string) string {
	plain := func(r rune) bool {
		return r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z' || r >= '0' && r <= '9' || strings.ContainsRune("_-./:,=", r)
	}
	if s != "" && !strings.ContainsFunc(s, func(r rune) bool { return !plain(r) }) {
		return s
	}
	return "'" + strings.ReplaceAll(s, "'", `'\''`) + "'"
}
