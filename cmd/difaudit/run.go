package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"slices"
	"strings"
	"time"
)

// Exit statuses of the commands.
const (
	statusDone      = 0
	statusFitFailed = 1 // audit: completed, but a fit failed; verify: something differs
	statusBadInput  = 2 // usage or input; nothing was written
	statusInternal  = 3
)

// environment is what a command may read and write beside the files it names.
type environment struct {
	getenv         func(string) string
	stdin          io.Reader
	stdout, stderr io.Writer
	now            func() time.Time
}

func currentTime() time.Time { return time.Now() }

// command is one word of the command line.
type command struct {
	name, does string
	run        func(ctx context.Context, args []string, env environment) int
}

func commands() []command {
	return []command{
		{"audit", "audit response files: Mantel-Haenszel and companions, A/B/C, evidence, report", runAudit},
		{"simulate", "write responses under a stated model with planted differences, and the truth", func(ctx context.Context, args []string, env environment) int {
			return runSimulate(ctx, args, env.stdout, env.stderr)
		}},
		{"verify", "check evidence against itself, and with the files against a new run", runVerify},
		{"version", "print version, commit and Go version", runVersion},
	}
}

// laterCommands are words of the contract that this version does not have.
var laterCommands = []string{"demo", "serve", "migrate", "key", "backup", "restore", "power"}

// run carries out one command line and returns the exit status.
func run(ctx context.Context, args []string, env environment) int {
	if len(args) == 0 {
		usage(env.stderr)
		return statusBadInput
	}
	switch name := args[0]; {
	case name == "help" || name == "-h" || name == "--help" || name == "-help":
		usage(env.stdout)
		return statusDone
	case slices.Contains(laterCommands, name):
		fmt.Fprintf(env.stderr, "difaudit: %s is not part of this version.\n", name)
		return statusBadInput
	default:
		for _, c := range commands() {
			if c.name == name {
				return c.run(ctx, args[1:], env)
			}
		}
		fmt.Fprintf(env.stderr, "difaudit: %q is not a command.\n", name)
		usage(env.stderr)
		return statusBadInput
	}
}

func usage(w io.Writer) {
	fmt.Fprintln(w, "difaudit audits exam items for differential item functioning (DIF).\n\nCommands:")
	for _, c := range commands() {
		fmt.Fprintf(w, "  difaudit %-9s %s\n", c.name, c.does)
	}
	fmt.Fprintln(w, "\nOptions of a command: difaudit COMMAND --help")
}

// newFlags returns an empty set of options whose errors the command prints itself.
func newFlags(name string) *flag.FlagSet {
	f := flag.NewFlagSet(name, flag.ContinueOnError)
	f.SetOutput(io.Discard)
	f.Usage = func() {}
	return f
}

// printOptions writes the options of a command, in the order of their names.
func printOptions(w io.Writer, f *flag.FlagSet) {
	f.VisitAll(func(o *flag.Flag) {
		value, help := flag.UnquoteUsage(o)
		help = strings.TrimLeft(strings.TrimPrefix(help, value), ": ,")
		name := "--" + o.Name
		if value != "" {
			name += " " + value
		}
		if o.DefValue != "" && o.DefValue != "false" && o.DefValue != "0" {
			help += " (default " + o.DefValue + ")"
		}
		fmt.Fprintf(w, "  %-32s %s\n", name, help)
	})
}

// parseFlags parses the options of a command; messages name them as they are written. An
// option given twice is refused, unless it stands in repeatable: the last one would win
// without a word.
func parseFlags(f *flag.FlagSet, args []string, repeatable ...string) error {
	seen := map[string]bool{}
	for i := 0; i < len(args); i++ {
		name, dashed := strings.CutPrefix(args[i], "-")
		name = strings.TrimPrefix(name, "-")
		if !dashed || name == "" {
			continue
		}
		name, _, joined := strings.Cut(name, "=")
		if seen[name] && f.Lookup(name) != nil && !slices.Contains(repeatable, name) {
			return fmt.Errorf("--%s is given twice; give it once", name)
		}
		seen[name] = true
		if o := f.Lookup(name); o != nil && !joined {
			if b, ok := o.Value.(interface{ IsBoolFlag() bool }); !ok || !b.IsBoolFlag() {
				i++ // the value
			}
		}
	}
	err := f.Parse(args)
	if err == nil || errors.Is(err, flag.ErrHelp) {
		return err
	}
	text := err.Error()
	if name, ok := strings.CutPrefix(text, "flag provided but not defined: -"); ok {
		return fmt.Errorf("--%s is not an option of this command", name)
	}
	if name, ok := strings.CutPrefix(text, "flag needs an argument: -"); ok {
		return fmt.Errorf("--%s needs a value", name)
	}
	return errors.New(strings.ReplaceAll(text, " for flag -", " for --"))
}

// commaList splits a list option; empty entries are dropped.
func commaList(s string) []string {
	out := []string{}
	for _, e := range strings.Split(s, ",") {
		if e = strings.TrimSpace(e); e != "" {
			out = append(out, e)
		}
	}
	return out
}

// openInput opens a file, or standard input for "-". Regular files are wanted: a folder is
// an error that says so.
func (env environment) openInput(path string) (io.ReadCloser, string, error) {
	if path == "-" {
		return io.NopCloser(env.stdin), "standard input", nil
	}
	f, err := os.Open(path)
	if err != nil {
		var p *os.PathError
		if errors.As(err, &p) {
			err = p.Err
		}
		return nil, "", fmt.Errorf("open %s: %w; check the path and your permissions", path, err)
	}
	if info, err := f.Stat(); err == nil && info.IsDir() {
		f.Close()
		return nil, "", fmt.Errorf("open %s: it is a folder; name a file", path)
	}
	return f, path, nil
}
