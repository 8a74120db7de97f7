// Difaudit audits exam items for differential item functioning.
package main

import (
	"context"
	"os"
	"os/signal"
	"runtime/debug"
	"syscall"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	context.AfterFunc(ctx, stop)   // a second signal ends the program at once
	debug.SetGCPercent(50)         // large tables live long: memory matters more than collecting seldom
	signal.Ignore(syscall.SIGPIPE) // a closed pipe is a write error, so that nothing is left half-written
	status := run(ctx, os.Args[1:], environment{
		getenv: os.Getenv, stdin: os.Stdin, stdout: os.Stdout, stderr: os.Stderr, now: currentTime,
	})
	stop()
	os.Exit(status)
}
