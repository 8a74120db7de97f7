package pgserver

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"time"
)

// oldestMajor is the oldest major version of Postgres the schema is written for.
const oldestMajor = 15

// Programs are the programs of one installed Postgres, by absolute path and all of the same
// major version.
type Programs struct {
	Major    int
	Postgres string
	InitDB   string
	// The client programs; empty where the machine has none of this major version.
	PgDump, PgRestore, Psql string
}

// folders are the places where systems keep Postgres programs outside PATH: Debian and
// Ubuntu, Red Hat, Alpine, a build from source, Homebrew, Linuxbrew, Postgres.app.
var folders = []string{
	"/usr/lib/postgresql/*/bin",
	"/usr/pgsql-*/bin",
	"/usr/libexec/postgresql*",
	"/usr/local/pgsql/bin",
	"/opt/homebrew/opt/postgresql@*/bin",
	"/usr/local/opt/postgresql@*/bin",
	"/home/linuxbrew/.linuxbrew/opt/postgresql@*/bin",
	"/Applications/Postgres.app/Contents/Versions/*/bin",
}

// Find returns the Postgres programs to use. binDir, where given, is the only folder looked
// at and must work. Otherwise PATH comes first and then the usual folders of each system,
// newest version first. Where dataDir already holds a cluster, only its major version will do.
//
// The error wraps ErrNotInstalled where nothing usable is found, and ErrOtherVersion where
// only programs of other major versions than that of the data are found.
func Find(binDir, dataDir string) (Programs, error) {
	wanted, err := clusterMajor(filepath.Join(dataDir, "cluster"))
	if err != nil {
		return Programs{}, err
	}
	if binDir != "" {
		p, err := programsIn(binDir)
		if err != nil {
			return Programs{}, fmt.Errorf("use the Postgres programs in %s, as was asked: %w", binDir, err)
		}
		if wanted != 0 && p.Major != wanted {
			return Programs{}, otherVersion(dataDir, wanted, []Programs{p})
		}
		return withClients(p, nil), nil
	}
	var usable []Programs
	dirs := searched(os.Getenv("PATH"), folders)
	for _, dir := range dirs {
		p, err := programsIn(dir)
		if err != nil {
			continue
		}
		if wanted == 0 || p.Major == wanted {
			return withClients(p, dirs), nil
		}
		usable = append(usable, p)
	}
	if len(usable) > 0 {
		return Programs{}, otherVersion(dataDir, wanted, usable)
	}
	return Programs{}, fmt.Errorf("%w: looked for the programs postgres and initdb, version %d or newer, on PATH and in the usual folders; %s",
		ErrNotInstalled, oldestMajor, installAdvice(wanted))
}

// searched lists the folders that may hold Postgres programs, links resolved, in the order of
// search and each once.
func searched(path string, patterns []string) []string {
	var dirs []string
	add := func(dir string) {
		program, err := filepath.EvalSymlinks(filepath.Join(dir, "postgres"))
		if err != nil {
			return
		}
		if dir = filepath.Dir(program); !slices.Contains(dirs, dir) {
			dirs = append(dirs, dir)
		}
	}
	for _, dir := range filepath.SplitList(path) {
		if filepath.IsAbs(dir) {
			add(dir)
		}
	}
	for _, pattern := range patterns {
		found, _ := filepath.Glob(pattern) // fails for a malformed pattern only
		slices.SortStableFunc(found, func(a, b string) int { return numberIn(b) - numberIn(a) })
		for _, dir := range found {
			add(dir)
		}
	}
	return dirs
}

var digits = regexp.MustCompile(`[0-9]+`)

// numberIn returns the last number of a path, by which folders of versions are ordered.
func numberIn(path string) int {
	numbers := digits.FindAllString(path, -1)
	if len(numbers) == 0 {
		return 0
	}
	n, _ := strconv.Atoi(numbers[len(numbers)-1])
	return n
}

// programsIn returns the server programs of one folder after asking both for their version.
func programsIn(dir string) (Programs, error) {
	dir, err := filepath.Abs(dir)
	if err != nil {
		return Programs{}, err
	}
	p := Programs{Postgres: filepath.Join(dir, "postgres"), InitDB: filepath.Join(dir, "initdb")}
	if p.Major, err = majorOf(p.Postgres); err != nil {
		return Programs{}, err
	}
	initMajor, err := majorOf(p.InitDB)
	if err != nil {
		return Programs{}, err
	}
	if initMajor != p.Major {
		return Programs{}, fmt.Errorf("%s is of version %d, but %s of version %d: give a folder with both programs of one version", p.Postgres, p.Major, p.InitDB, initMajor)
	}
	if p.Major < oldestMajor {
		return Programs{}, fmt.Errorf("%s is of version %d: version %d or newer is needed", p.Postgres, p.Major, oldestMajor)
	}
	return p, nil
}

// withClients adds the client programs: those beside the server, else those of the same major
// version on PATH or in another folder.
func withClients(p Programs, dirs []string) Programs {
	for _, c := range []struct {
		name string
		path *string
	}{{"pg_dump", &p.PgDump}, {"pg_restore", &p.PgRestore}, {"psql", &p.Psql}} {
		beside := filepath.Join(filepath.Dir(p.Postgres), c.name)
		if _, err := exec.LookPath(beside); err == nil {
			*c.path = beside
			continue
		}
		candidates := make([]string, 0, len(dirs)+1)
		if onPath, err := exec.LookPath(c.name); err == nil {
			candidates = append(candidates, onPath)
		}
		for _, dir := range dirs {
			candidates = append(candidates, filepath.Join(dir, c.name))
		}
		for _, path := range candidates {
			if major, err := majorOf(path); err == nil && major == p.Major {
				*c.path = path
				break
			}
		}
	}
	return p
}

var versionText = regexp.MustCompile(`\(PostgreSQL\) ([0-9]+)`)

// majorOf runs a Postgres program to learn its major version.
func majorOf(program string) (int, error) {
	if _, err := os.Stat(program); err != nil {
		return 0, fmt.Errorf("find program: %w", err)
	}
	ctx, cancel := context.WithTimeout(context.Background(), 10*time.Second)
	defer cancel()
	cmd := exec.CommandContext(ctx, program, "--version")
	cmd.Dir = "/"
	cmd.Env = childEnvironment()
	cmd.WaitDelay = time.Second
	out, err := cmd.CombinedOutput()
	if err != nil {
		return 0, fmt.Errorf("ask %s for its version: %w%s", program, err, quoted(out))
	}
	match := versionText.FindSubmatch(out)
	if match == nil {
		return 0, fmt.Errorf("ask %s for its version: the answer is not that of a Postgres program%s", program, quoted(out))
	}
	return strconv.Atoi(string(match[1]))
}

// clusterMajor returns the major version a cluster was made by, 0 where there is none yet.
func clusterMajor(cluster string) (int, error) {
	file := filepath.Join(cluster, "PG_VERSION")
	text, err := os.ReadFile(file)
	switch {
	case errors.Is(err, os.ErrNotExist):
		return 0, nil
	case err != nil:
		return 0, fmt.Errorf("read the version of the data (start as root or as the owner of %s): %w", cluster, err)
	}
	major, err := strconv.Atoi(string(digits.Find(text)))
	if err != nil {
		return 0, fmt.Errorf("read the version of the data: %s holds %.20q, not a version", file, text)
	}
	return major, nil
}

// otherVersion words the refusal of another major version's data, with both versions and the
// two ways out.
func otherVersion(dataDir string, wanted int, here []Programs) error {
	if wanted < oldestMajor {
		return fmt.Errorf("%w: the data in %s were made by Postgres %d, and the programs here are of version %d (%s). Version %d is too old to be used: "+
			"dump the data with the programs of version %d and load them into a new data directory",
			ErrOtherVersion, dataDir, wanted, here[0].Major, here[0].Postgres, wanted, wanted)
	}
	return fmt.Errorf("%w: the data in %s were made by Postgres %d, and the programs here are of version %d (%s). "+
		"Either install Postgres %d as well (%s) and start again; "+
		"or, where Postgres %d still runs, write the data to a file with 'difaudit backup', and load it here into a new data directory with 'difaudit restore'",
		ErrOtherVersion, dataDir, wanted, here[0].Major, here[0].Postgres, wanted, installAdvice(wanted), wanted)
}
