package main

import (
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
)

// outputs are files written together at the end of a command: each first under a name
// of its own beside its target, then all renamed, so that a command that fails leaves
// nothing half-written.
type outputs struct {
	stdout  io.Writer
	targets []target
}

type target struct {
	option, path string
	write        func(io.Writer) error
}

// add names a target; an empty path is none.
func (o *outputs) add(option, path string, write func(io.Writer) error) {
	if path != "" {
		o.targets = append(o.targets, target{option, path, write})
	}
}

// toStdout reports whether some target is standard output.
func (o *outputs) toStdout() bool {
	for _, t := range o.targets {
		if t.path == "-" {
			return true
		}
	}
	return false
}

// check finds, before any work, what would keep the targets from being written. inputs
// are paths that must not be overwritten.
func (o *outputs) check(inputs []string) error {
	for i, t := range o.targets {
		for _, other := range o.targets[:i] {
			if same(other.path, t.path) {
				return fmt.Errorf("%s and %s name the same output", other.option, t.option)
			}
		}
		if t.path == "-" {
			continue
		}
		for _, in := range inputs {
			if in != "" && in != "-" && same(in, t.path) {
				return fmt.Errorf("%s would overwrite the input %s", t.option, in)
			}
		}
		folder := filepath.Dir(t.path)
		if info, err := os.Stat(folder); err != nil || !info.IsDir() {
			return fmt.Errorf("%s: the folder %s does not exist; make it first", t.option, folder)
		}
		if info, err := os.Stat(t.path); err == nil && !info.Mode().IsRegular() {
			return fmt.Errorf("%s: %s is not a file that can be replaced", t.option, t.path)
		}
		f, err := os.CreateTemp(folder, ".difaudit-*")
		if err != nil {
			return fmt.Errorf("%s: cannot write in %s", t.option, folder)
		}
		f.Close()
		os.Remove(f.Name())
	}
	return nil
}

func same(a, b string) bool {
	if a == b {
		return true
	}
	x, errX := os.Stat(a)
	y, errY := os.Stat(b)
	return errX == nil && errY == nil && os.SameFile(x, y)
}

// write writes every target.
func (o *outputs) write() (err error) {
	var written []string
	defer func() {
		if err != nil {
			for _, name := range written {
				os.Remove(name)
			}
		}
	}()
	for _, t := range o.targets {
		if t.path == "-" {
			continue
		}
		f, err := os.CreateTemp(filepath.Dir(t.path), ".difaudit-*")
		if err != nil {
			return fmt.Errorf("%s: %w", t.option, err)
		}
		written = append(written, f.Name())
		err = errors.Join(t.write(f), f.Chmod(0o644), f.Sync(), f.Close())
		if err != nil {
			return fmt.Errorf("%s: %w", t.option, err)
		}
	}
	i := 0
	for _, t := range o.targets {
		if t.path == "-" {
			if err := t.write(o.stdout); err != nil {
				return fmt.Errorf("%s: %w", t.option, err)
			}
			continue
		}
		if err := os.Rename(written[i], t.path); err != nil {
			return fmt.Errorf("%s: %w", t.option, err)
		}
		i++
	}
	return nil
}
