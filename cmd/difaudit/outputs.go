package main

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
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
	mode         os.FileMode // before the umask
	write        func(io.Writer) error
}

// add names a target; an empty path is none.
func (o *outputs) add(option, path string, mode os.FileMode, write func(io.Writer) error) {
	if path != "" {
		o.targets = append(o.targets, target{option, path, mode, write})
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
		f, err := t.create()
		if err != nil {
			return fmt.Errorf("%s: cannot write in %s; choose another folder or change its permissions", t.option, folder)
		}
		f.Close()
		os.Remove(f.Name())
	}
	return nil
}

// create opens a new file beside the target.
func (t target) create() (*os.File, error) {
	for i := 0; ; i++ {
		name := filepath.Join(filepath.Dir(t.path), fmt.Sprintf(".difaudit-%d-%d", os.Getpid(), i))
		f, err := os.OpenFile(name, os.O_WRONLY|os.O_CREATE|os.O_EXCL, t.mode)
		if !errors.Is(err, fs.ErrExist) {
			return f, err
		}
	}
}

// same reports whether two paths name one file, also one that does not exist yet.
func same(a, b string) bool {
	if a == "-" || b == "-" {
		return a == b
	}
	if full(a) == full(b) {
		return true
	}
	x, errX := os.Stat(a)
	y, errY := os.Stat(b)
	return errX == nil && errY == nil && os.SameFile(x, y)
}

func full(path string) string {
	path, err := filepath.Abs(path)
	if err != nil {
		return path
	}
	if folder, err := filepath.EvalSymlinks(filepath.Dir(path)); err == nil {
		return filepath.Join(folder, filepath.Base(path))
	}
	return path
}

// write writes every target. Files appear under their names only when everything is
// written, standard output and what say prints included; an error says whether any did.
func (o *outputs) write(say func() error) (err error) {
	written := make([]string, len(o.targets))
	var inPlace []string
	defer func() {
		if err == nil {
			return
		}
		for _, name := range written {
			if name != "" {
				os.Remove(name)
			}
		}
		if len(inPlace) == 0 {
			err = fmt.Errorf("%w; no file was written", err)
		} else {
			err = fmt.Errorf("%w; already written: %s", err, strings.Join(inPlace, ", "))
		}
	}()
	var out bytes.Buffer
	for i, t := range o.targets {
		if t.path == "-" {
			if err := t.write(&out); err != nil {
				return fmt.Errorf("%s: %w", t.option, err)
			}
			continue
		}
		f, err := t.create()
		if err != nil {
			return fmt.Errorf("%s: %w", t.option, err)
		}
		written[i] = f.Name()
		if err := errors.Join(t.write(f), f.Sync(), f.Close()); err != nil {
			return fmt.Errorf("%s: %w", t.option, err)
		}
	}
	if _, err := o.stdout.Write(out.Bytes()); err != nil {
		return fmt.Errorf("write standard output: %w", err)
	}
	if err := say(); err != nil {
		return err
	}
	for i, t := range o.targets {
		if t.path == "-" {
			continue
		}
		if err := os.Rename(written[i], t.path); err != nil {
			return fmt.Errorf("%s: %w", t.option, err)
		}
		written[i] = ""
		inPlace = append(inPlace, t.path)
	}
	return nil
}
