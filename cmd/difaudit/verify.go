package main

import (
	"bytes"
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"runtime"

	"difaudit/dif"
)

// mostEvidence is the size above which a file is not taken for evidence.
const mostEvidence = 4 << 30

// mostDifferences is how many differences are printed.
const mostDifferences = 50

// runVerify checks evidence: alone against itself, with the files against a new run.
func runVerify(ctx context.Context, args []string, env environment) int {
	var inputs inputFiles
	f := newFlags("verify")
	inputs.options(f)
	workers := f.Int("workers", runtime.NumCPU(), "`N`: number of goroutines")
	bad := func(err error) int {
		fmt.Fprintf(env.stderr, "difaudit verify: %v\n", err)
		return statusBadInput
	}
	// The evidence may stand before or after the options.
	var path string
	rest := args
	for {
		if err := parseFlags(f, rest); errors.Is(err, flag.ErrHelp) {
			fmt.Fprintln(env.stdout, "difaudit verify EVIDENCE [--responses FILE] [--items FILE] [--forms FILE] [--candidates FILE]\n\nOptions:")
			printOptions(env.stdout, f)
			return statusDone
		} else if err != nil {
			return bad(fmt.Errorf("%w\nOptions: difaudit verify --help", err))
		}
		if f.NArg() == 0 {
			break
		}
		if path != "" {
			return bad(fmt.Errorf("one evidence file at a time; %q is one too many", f.Arg(0)))
		}
		path, rest = f.Arg(0), f.Args()[1:]
	}
	switch {
	case path == "":
		return bad(errors.New("name the evidence file to check"))
	case *workers < 1:
		return bad(errors.New("--workers: give a number of at least 1"))
	case inputs.responses == "" && (inputs.items != "" || inputs.forms != "" || inputs.candidates != ""):
		return bad(errors.New("to compute the audit again, name the responses file too (--responses)"))
	}
	r, name, err := env.openInput(path)
	if err != nil {
		return bad(err)
	}
	stored, err := io.ReadAll(io.LimitReader(r, mostEvidence))
	r.Close()
	if err != nil {
		return bad(fmt.Errorf("read %s: %w", name, err))
	}
	evidence, err := dif.DecodeEvidence(stored)
	if err != nil {
		return bad(fmt.Errorf("%s: %w", name, err))
	}
	fmt.Fprintf(env.stdout, "SHA-256 of the evidence, as printed on its report: %s\n", digest(stored))

	differs := false
	say := func(format string, args ...any) {
		differs = true
		fmt.Fprintf(env.stdout, format+"\n", args...)
	}
	canonical, err := evidence.Encode()
	if err != nil {
		fmt.Fprintf(env.stderr, "difaudit verify: %v\n", err)
		return statusInternal
	}
	if !bytes.Equal(canonical, stored) {
		say("Differs: the bytes are not those the engine writes for this content; the file was edited or re-formatted.")
	}
	for _, d := range evidence.Disagreements() {
		say("Differs: %s.", d)
	}
	if !differs {
		fmt.Fprintln(env.stdout, "The evidence agrees with itself: statistics follow from the strata, letters from the statistics, counts from the letters.")
	}
	if inputs.responses != "" {
		status, again := recompute(ctx, env, evidence, inputs, *workers)
		if status != statusDone {
			return status
		}
		if evidence.Engine != again.Engine {
			say("Engine: stored %s, this program is %s.", evidence.Engine.Version, again.Engine.Version)
		}
		encoded, err := again.Encode()
		if err != nil {
			fmt.Fprintf(env.stderr, "difaudit verify: %v\n", err)
			return statusInternal
		}
		sentences, total, err := dif.Differences(stored, encoded, mostDifferences)
		if err != nil {
			return bad(err)
		}
		for _, s := range sentences {
			say("Differs: %s.", s)
		}
		if more := total - len(sentences); more > 0 {
			say("... and %d more differences.", more)
		}
		switch {
		case bytes.Equal(stored, encoded):
			fmt.Fprintln(env.stdout, "Computed again from the files: the same, byte for byte.")
		case total == 0:
			fmt.Fprintln(env.stdout, "Computed again from the files: the same; numbers agree to a relative 1e-9, everything else exactly.")
		}
	}
	if differs {
		return statusFitFailed
	}
	return statusDone
}

// recompute runs the stored plan on the files. Every file the evidence came from is wanted.
func recompute(ctx context.Context, env environment, stored *dif.Evidence, inputs inputFiles, workers int) (int, *dif.Evidence) {
	given := map[string]string{"responses": inputs.responses, "items": inputs.items, "forms": inputs.forms, "candidates": inputs.candidates}
	administration := ""
	for _, s := range stored.Inputs.Sources {
		if given[s.Kind] == "" {
			fmt.Fprintf(env.stderr, "difaudit verify: the audit also read a file of kind %s; name it with --%s.\n", s.Kind, s.Kind)
			return statusBadInput, nil
		}
		if s.Administration != nil {
			administration = *s.Administration
		}
	}
	bar := newProgress(env.stderr)
	result, err := inputs.read(ctx, env, stored.Plan, administration, bar.rows)
	bar.end()
	if status, failed := readFailed(ctx, "verify", err, env); failed {
		return status, nil
	}
	again, err := dif.Run(ctx, stored.Plan, result.Data, dif.Options{Workers: workers, Progress: bar.step})
	bar.end()
	switch {
	case errors.Is(err, dif.ErrInput):
		fmt.Fprintf(env.stderr, "difaudit verify: %v\n", err)
		return statusBadInput, nil
	case err != nil:
		fmt.Fprintf(env.stderr, "difaudit verify: %v\n", err)
		return statusInternal, nil
	}
	return statusDone, again
}
