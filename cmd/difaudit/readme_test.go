package main

import (
	"flag"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"difaudit/store/intake"
)

// Every command of the README runs as it is written, every example plan is valid, and
// every option of the audit stands in its table.
func TestReadme(t *testing.T) {
	root, err := filepath.Abs("../..")
	if err != nil {
		t.Fatal(err)
	}
	readme, err := os.ReadFile(filepath.Join(root, "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	exam, err := os.ReadFile(verbalBinary)
	if err != nil {
		t.Fatal(err)
	}
	t.Chdir(t.TempDir())
	if err := os.Symlink(filepath.Join(root, "testdata"), "testdata"); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile("exam.csv", exam, 0o600); err != nil {
		t.Fatal(err)
	}
	commands, plans := 0, 0
	for _, block := range regexp.MustCompile("(?s)```([a-z]*)\n(.*?)```").FindAllStringSubmatch(string(readme), -1) {
		switch block[1] {
		case "yaml":
			plans++
			if _, err := intake.ReadPlan("README.md", strings.NewReader(block[2])); err != nil {
				t.Errorf("the example plan is not valid: %v", err)
			}
		case "sh":
			for _, line := range strings.Split(strings.TrimSpace(block[2]), "\n") {
				words := strings.Fields(line)
				switch {
				case strings.HasPrefix(line, "go run ./cmd/difaudit "):
					words = words[3:]
				case words[0] == "difaudit":
					words = words[1:]
				default:
					continue
				}
				commands++
				if r := difaudit(t, "", words...); r.status != statusDone {
					t.Errorf("%s: status %d\n%s%s", line, r.status, r.stdout, r.stderr)
				}
			}
		}
	}
	if commands < 5 || plans < 1 {
		t.Errorf("only %d commands and %d plans were found", commands, plans)
	}
	for _, name := range []string{"evidence.json", "report.pdf", "findings.csv", "practice/responses.csv"} {
		if info, err := os.Stat(name); err != nil || info.Size() == 0 {
			t.Errorf("the README promises %s: %v", name, err)
		}
	}
	_, options, err := parseAudit([]string{"--responses", "x"})
	if err != nil {
		t.Fatal(err)
	}
	options.VisitAll(func(f *flag.Flag) {
		if f.Name != "model" && f.Name != "anchors" && !strings.Contains(string(readme), "`--"+f.Name) {
			t.Errorf("--%s does not stand in the README", f.Name)
		}
	})
}
