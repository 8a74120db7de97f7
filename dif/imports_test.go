package dif

import (
	"encoding/json"
	"errors"
	"io"
	"os/exec"
	"slices"
	"strings"
	"testing"
)

const module = "difaudit"

// pure lists what packages under dif may import directly from the standard library:
// nothing that reads files, the network, the clock or the environment.
var pure = []string{
	"bufio", "bytes", "cmp", "context", "crypto/sha256", "encoding/binary", "encoding/hex", "encoding/json", "errors", "fmt",
	"hash", "io", "iter", "maps", "math", "math/big", "math/bits", "math/rand/v2", "slices", "sort", "strconv", "strings", "sync", "sync/atomic",
	"unicode", "unicode/utf8",
}

// mayImport lists, per folder, the folders of this module it may import. A folder stands
// for itself and everything below it.
var mayImport = map[string][]string{
	"dif":          {"dif"},
	"migrations":   {},
	"store":        {"dif", "migrations", "store"},
	"store/intake": {"dif"},
	"reports":      {"dif", "reports"},
	"api":          {"dif", "store", "reports", "api"},
	"cmd":          {"dif", "store", "reports", "api", "migrations", "cmd"},
}

type listed struct {
	ImportPath string
	Imports    []string
	Deps       []string
}

func listPackages(t *testing.T, patterns ...string) []listed {
	t.Helper()
	cmd := exec.Command("go", append([]string{"list", "-json=ImportPath,Imports,Deps"}, patterns...)...)
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	var all []listed
	for dec := json.NewDecoder(strings.NewReader(string(out))); ; {
		var p listed
		err := dec.Decode(&p)
		if errors.Is(err, io.EOF) {
			return all
		}
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, p)
	}
}

func below(path, folder string) bool { return path == folder || strings.HasPrefix(path, folder+"/") }

// Imports go one way: dif decides and imports nothing of ours, the rest carries.
func TestImportDirection(t *testing.T) {
	seen := map[string]bool{}
	for _, p := range listPackages(t, module+"/...") {
		path := strings.TrimPrefix(p.ImportPath, module+"/")
		folder := "" // the longest rule that covers the package
		for f := range mayImport {
			if below(path, f) && len(f) > len(folder) {
				folder = f
			}
		}
		if folder == "" {
			t.Errorf("%s lies outside the fixed layout", path)
			continue
		}
		seen[folder] = true
		for _, imported := range p.Imports {
			ours, isOurs := strings.CutPrefix(imported, module+"/")
			if isOurs && !slices.ContainsFunc(mayImport[folder], func(f string) bool { return below(ours, f) }) {
				t.Errorf("%s imports %s", path, ours)
			}
		}
	}
	if !seen["dif"] {
		t.Error("the packages of dif were not found")
	}
}

// Packages under dif import only the listed standard packages, each other, and gonum with
// what it needs.
func TestStatisticsArePure(t *testing.T) {
	for _, p := range listPackages(t, module+"/dif/...") {
		for _, imported := range p.Imports {
			switch {
			case below(imported, module+"/dif"), below(imported, "gonum.org/v1/gonum"):
			case strings.Contains(strings.Split(imported, "/")[0], "."):
				t.Errorf("%s imports the module %s", p.ImportPath, imported)
			case !slices.Contains(pure, imported):
				t.Errorf("%s imports %s", p.ImportPath, imported)
			}
		}
		for _, dep := range p.Deps {
			if strings.Contains(strings.Split(dep, "/")[0], ".") && !below(dep, "gonum.org/v1/gonum") {
				t.Errorf("%s needs the module %s", p.ImportPath, dep)
			}
		}
	}
}
