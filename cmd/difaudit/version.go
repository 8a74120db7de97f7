package main

import (
	"context"
	"fmt"
	"runtime"
	"runtime/debug"

	"difaudit/dif"
)

// runVersion prints what the binary was built from.
func runVersion(_ context.Context, args []string, env environment) int {
	if len(args) > 0 {
		fmt.Fprintln(env.stderr, "difaudit version: takes no arguments.")
		return statusBadInput
	}
	commit := "unknown"
	if info, ok := debug.ReadBuildInfo(); ok {
		for _, s := range info.Settings {
			switch {
			case s.Key == "vcs.revision":
				commit = s.Value
			case s.Key == "vcs.modified" && s.Value == "true":
				commit += " (changed since)"
			}
		}
	}
	fmt.Fprintf(env.stdout, "difaudit %s\ncommit %s\n%s %s/%s\n", dif.EngineVersion, commit, runtime.Version(), runtime.GOOS, runtime.GOARCH)
	return statusDone
}
