package main

import (
	"bytes"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func TestOutputsAppearTogetherOrNotAtAll(t *testing.T) {
	t.Parallel()
	text := func(s string) func(io.Writer) error {
		return func(w io.Writer) error { _, err := io.WriteString(w, s); return err }
	}
	broken := errors.New("broken")
	fails := func(w io.Writer) error { _, _ = io.WriteString(w, "half"); return broken }
	for _, c := range []struct {
		name   string
		second func(io.Writer) error
		stdout io.Writer
		say    error
		want   bool
	}{
		{"all well", text("b"), &bytes.Buffer{}, nil, true},
		{"one target fails", fails, &bytes.Buffer{}, nil, false},
		{"standard output is closed", text("b"), closedWriter{}, nil, false},
		{"the table cannot be printed", text("b"), &bytes.Buffer{}, broken, false},
	} {
		dir := t.TempDir()
		first, second := filepath.Join(dir, "first"), filepath.Join(dir, "second")
		if err := os.WriteFile(first, []byte("old"), 0o600); err != nil {
			t.Fatal(err)
		}
		o := outputs{stdout: c.stdout}
		o.add("--a", first, 0o600, text("a"))
		o.add("--b", second, 0o666, c.second)
		o.add("--c", "-", 0, text("c"))
		if err := o.check(nil); err != nil {
			t.Fatal(err)
		}
		err := o.write(func() error { return c.say })
		if (err == nil) != c.want {
			t.Errorf("%s: %v", c.name, err)
		}
		content, readErr := os.ReadFile(first)
		if readErr != nil {
			t.Fatal(readErr)
		}
		left, readErr := os.ReadDir(dir)
		if readErr != nil {
			t.Fatal(readErr)
		}
		if c.want && (string(content) != "a" || len(left) != 2) || !c.want && (string(content) != "old" || len(left) != 1) {
			t.Errorf("%s: first holds %q, %d files are left", c.name, content, len(left))
		}
		if info, err := os.Stat(first); err != nil || info.Mode().Perm() != 0o600 {
			t.Errorf("%s: the evidence may be read by others: %v %v", c.name, info.Mode(), err)
		}
	}
}

type closedWriter struct{}

func (closedWriter) Write([]byte) (int, error) { return 0, os.ErrClosed }

func TestOutputsOfOneFileAreRefused(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	link := filepath.Join(t.TempDir(), "link")
	if err := os.Symlink(dir, link); err != nil {
		t.Fatal(err)
	}
	write := func(io.Writer) error { return nil }
	for _, other := range []string{filepath.Join(dir, ".", "x"), dir + "//x", filepath.Join(link, "x")} {
		o := outputs{}
		o.add("--a", filepath.Join(dir, "x"), 0o600, write)
		o.add("--b", other, 0o600, write)
		if err := o.check(nil); err == nil {
			t.Errorf("%s was taken for another file", other)
		}
		o = outputs{}
		o.add("--a", filepath.Join(dir, "x"), 0o600, write)
		if err := o.check([]string{other}); err == nil {
			t.Errorf("%s, an input, may be overwritten", other)
		}
	}
}

// When a file cannot be put in place after others were, the error names those.
func TestOutputsThatCannotAllBePlaced(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	first, second := filepath.Join(dir, "first"), filepath.Join(dir, "second")
	write := func(w io.Writer) error { _, err := io.WriteString(w, "x"); return err }
	o := outputs{stdout: io.Discard}
	o.add("--a", first, 0o600, write)
	o.add("--b", second, 0o600, write)
	err := o.write(func() error { return os.MkdirAll(filepath.Join(second, "full"), 0o700) })
	if err == nil || !strings.Contains(err.Error(), "already written: "+first) {
		t.Errorf("error %v", err)
	}
	if left, err := os.ReadDir(dir); err != nil || len(left) != 2 {
		t.Errorf("%d entries are left, want the file and the folder (%v)", len(left), err)
	}
	o = outputs{stdout: closedWriter{}}
	o.add("--a", filepath.Join(dir, "third"), 0o600, write)
	if err := o.write(func() error { return nil }); err == nil || !strings.Contains(err.Error(), "no file was written") {
		t.Errorf("error %v", err)
	}
}
