package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func TestVerify(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	evidence := filepath.Join(dir, "evidence.json")
	difaudit(t, "", "audit", "--responses", verbalBinary, "--comparison", "gender:F:M", "--min-smaller-group", "0", "--min-total", "0",
		"--administration", "A-1", "--evidence", evidence, "--report", filepath.Join(dir, "r.pdf")).want(t, statusDone)
	stored, err := os.ReadFile(evidence)
	if err != nil {
		t.Fatal(err)
	}
	write := func(name, content string) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(content), 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	data, err := os.ReadFile(verbalBinary)
	if err != nil {
		t.Fatal(err)
	}

	difaudit(t, "", "verify", evidence).want(t, 0, digest(stored), "agrees with itself")
	difaudit(t, "", "verify", evidence, "--responses", verbalBinary).want(t, 0, "byte for byte")
	difaudit(t, "", "verify", "--responses", verbalBinary, evidence).want(t, 0, "byte for byte")

	change := func(old, new string) string {
		t.Helper()
		s := strings.Replace(string(stored), old, new, 1)
		if s == string(stored) {
			t.Fatalf("%s is not in the evidence", old)
		}
		return write("changed.json", s)
	}
	difaudit(t, "", "verify", change(`"class":"C+"`, `"class":"B+"`)).want(t, 1, "S3DoCurse")
	difaudit(t, "", "verify", change(`"title":"DIF audit"`, `"title": "DIF audit"`)).want(t, 1, "re-formatted")
	r := difaudit(t, "", "verify", change(`"title":"DIF audit"`, `"title":"Other"`))
	r.want(t, 0, "agrees with itself") // nothing inside contradicts it; its digest is no longer the report's
	if strings.Contains(r.stdout, digest(stored)) {
		t.Error("the digest of changed evidence is the old one")
	}
	difaudit(t, "", "verify", change(`"seed":1`, `"seed":1,"more":2`)).want(t, 2, "more")
	difaudit(t, "", "verify", change(`"class_if_corrected":"A"}`, `"class_if_corrected":"A"},"odd":{}`)).want(t, 2, "odd")
	difaudit(t, "", "verify", change("difaudit/evidence/1", "difaudit/evidence/9")).want(t, 2, "difaudit/evidence/9")
	difaudit(t, "", "verify", write("no.json", "not evidence")).want(t, 2, "no.json")
	difaudit(t, "", "verify", filepath.Join(dir, "absent.json")).want(t, 2, "absent.json")
	difaudit(t, "", "verify").want(t, 2, "name the evidence")

	// One answer changed: another file digest, other data, other statistics.
	other := write("other.csv", strings.Replace(string(data), "P001,M,0", "P001,M,1", 1))
	difaudit(t, "", "verify", evidence, "--responses", other).want(t, 1, "data_sha256", "S1WantCurse")
	// Other file bytes with the same answers: only the file's digest differs.
	r = difaudit(t, "", "verify", evidence, "--responses", write("crlf.csv", strings.ReplaceAll(string(data), "\n", "\r\n")))
	r.want(t, 1, "inputs.sources[responses].sha256")
	if n := strings.Count(r.stdout, "Differs"); n != 1 {
		t.Errorf("%d differences, want the file digest alone:\n%s", n, r.stdout)
	}
	difaudit(t, "", "verify", evidence, "--responses", write("bad.csv", "candidate_id,gender\n")).want(t, 2, "bad.csv")
	difaudit(t, "", "verify", evidence, "--items", other).want(t, 2, "--responses")
}
