package rules

import (
	"errors"
	"fmt"
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"sort"
	"strconv"
	"strings"
	"testing"
)

// floors are the rooms from the ground up. A package imports its own room and rooms of
// lower floors: never a higher one, never another room of its own floor.
var floors = [][]string{
	{"internal"},
	{"sdomain", "zdomain"},
	{"discretize"},
	{"firmware", "sim", "loop"},
	{"study"},
	{"charts"},
	{"cmd"},
}

// only narrows what a room may import of this module further.
var only = map[string][]string{"charts": {"charts", "study"}}

// graph gives for each package of the module, by its path below the module root, the
// packages that its files import, the same way.
type graph map[string][]string

// violations lists the arrows that break the rules, sorted.
func violations(g graph) []string {
	floor := map[string]int{}
	for i, rooms := range floors {
		for _, r := range rooms {
			floor[r] = i
		}
	}
	var bad []string
	for from, imports := range g {
		a := room(from)
		if _, ok := floor[a]; !ok {
			bad = append(bad, from+": no such room")
			continue
		}
		for _, to := range imports {
			b := room(to)
			_, known := floor[b]
			switch {
			case !known:
				bad = append(bad, fmt.Sprintf("%s imports %s: no such room", from, to))
			case a == b:
			case floor[b] >= floor[a]:
				bad = append(bad, fmt.Sprintf("%s imports %s: %s is not below %s", from, to, b, a))
			case only[a] != nil && !slices.Contains(only[a], b):
				bad = append(bad, fmt.Sprintf("%s imports %s: %s imports only %s", from, to, a, strings.Join(only[a], ", ")))
			}
		}
	}
	sort.Strings(bad)
	return bad
}

func room(pkg string) string {
	first, _, _ := strings.Cut(pkg, "/")
	return first
}

// read collects the imports of every Go file below root, whatever its build tags say. Test
// files are left out when tests is false. Folders that the go command ignores, and other
// modules, are left out.
func read(root, module string, tests bool) (graph, error) {
	g := graph{}
	err := filepath.WalkDir(root, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if d.IsDir() {
			return enter(root, path, d.Name())
		}
		if !strings.HasSuffix(path, ".go") || !tests && strings.HasSuffix(path, "_test.go") {
			return nil
		}
		return g.add(root, module, path)
	})
	return g, err
}

// enter returns fs.SkipDir for a folder that holds no package of the module.
func enter(root, path, name string) error {
	if path == root {
		return nil
	}
	if name == "testdata" || name == "node_modules" || name == "vendor" || strings.HasPrefix(name, ".") || strings.HasPrefix(name, "_") {
		return fs.SkipDir
	}
	if _, err := os.Stat(filepath.Join(path, "go.mod")); err == nil {
		return fs.SkipDir
	}
	return nil
}

func (g graph) add(root, module, path string) error {
	f, err := parser.ParseFile(token.NewFileSet(), path, nil, parser.ImportsOnly)
	if err != nil {
		return err
	}
	dir, err := filepath.Rel(root, filepath.Dir(path))
	if err != nil {
		return err
	}
	pkg := filepath.ToSlash(dir)
	if _, ok := g[pkg]; !ok {
		g[pkg] = nil
	}
	for _, spec := range f.Imports {
		to, err := strconv.Unquote(spec.Path.Value)
		if err != nil {
			return err
		}
		if rest, ok := strings.CutPrefix(to, module+"/"); ok {
			g[pkg] = append(g[pkg], rest)
		}
	}
	return nil
}

// moduleName reads the first line of go.mod.
func moduleName(root string) (string, error) {
	b, err := os.ReadFile(filepath.Join(root, "go.mod"))
	if err != nil {
		return "", err
	}
	line, _, _ := strings.Cut(string(b), "\n")
	name, ok := strings.CutPrefix(line, "module ")
	if !ok {
		return "", errors.New("go.mod does not begin with its module line")
	}
	return strings.TrimSpace(name), nil
}

func TestImportsPointDown(t *testing.T) {
	root := filepath.Join("..", "..")
	module, err := moduleName(root)
	if err != nil {
		t.Fatal(err)
	}
	g, err := read(root, module, false)
	if err != nil {
		t.Fatal(err)
	}
	// The reader is known to work when it sees what is certainly there.
	if !slices.Contains(g["zdomain"], "internal/exact") {
		t.Fatalf("zdomain imports internal/exact, but the reader found %v", g["zdomain"])
	}
	for _, v := range violations(g) {
		t.Error(v)
	}
}

// TestViolations shows that the check fails where it should, on invented graphs.
func TestViolations(t *testing.T) {
	for _, c := range []struct {
		name string
		g    graph
		want string // a part of the only violation; "" for none
	}{
		{"the whole way down", graph{"cmd/x": {"charts", "study", "internal/a"}, "charts": {"study"}, "study": {"sim", "loop", "discretize"}, "sim": {"discretize", "sdomain"}, "discretize": {"sdomain", "zdomain"}, "zdomain": {"internal/a"}, "internal/a": {"internal/b"}}, ""},
		{"own room", graph{"charts": {"charts/draw"}, "internal/a": {"internal/b/c"}}, ""},
		{"up by one", graph{"discretize": {"loop"}}, "loop is not below discretize"},
		{"up from the ground", graph{"internal/a": {"sdomain"}}, "sdomain is not below internal"},
		{"up to a command", graph{"study": {"cmd/x"}}, "cmd is not below study"},
		{"sim and loop", graph{"sim": {"loop"}}, "loop is not below sim"},
		{"loop and sim", graph{"loop": {"sim"}}, "sim is not below loop"},
		{"firmware and loop", graph{"firmware": {"loop"}}, "loop is not below firmware"},
		{"the two domains", graph{"sdomain": {"zdomain"}}, "zdomain is not below sdomain"},
		{"the two domains, other way", graph{"zdomain": {"sdomain"}}, "sdomain is not below zdomain"},
		{"charts compute", graph{"charts": {"study", "internal/a"}}, "charts imports only charts, study"},
		{"charts read loops", graph{"charts/draw": {"loop"}}, "charts imports only charts, study"},
		{"a new room", graph{"misc": {"internal/a"}}, "misc: no such room"},
		{"into a new room", graph{"study": {"misc"}}, "study imports misc: no such room"},
	} {
		t.Run(c.name, func(t *testing.T) {
			got := violations(c.g)
			switch {
			case c.want == "" && len(got) > 0:
				t.Errorf("found %v", got)
			case c.want != "" && (len(got) != 1 || !strings.Contains(got[0], c.want)):
				t.Errorf("found %v, want %q", got, c.want)
			}
		})
	}
}

// TestReadSeesTheFiles shows that the reader finds imports in a tree with the things it must pass over.
func TestReadSeesTheFiles(t *testing.T) {
	root := t.TempDir()
	for path, text := range map[string]string{
		"study/a.go":           "package study\nimport \"m/loop\"\n",
		"study/b.go":           "//go:build never\n\npackage study\nimport x \"m/sim\"\n",
		"study/c_test.go":      "package study\nimport \"m/cmd/x\"\n",
		"study/testdata/d.go":  "package d\nimport \"m/bad\"\n",
		"tools/go.mod":         "module m/tools\n",
		"tools/e.go":           "package tools\nimport \"m/bad\"\n",
		"node_modules/p/f.go":  "package f\nimport \"m/bad\"\n",
		"internal/deep/g/g.go": "package g\nimport (\n\t\"fmt\"\n\t\"elsewhere/m/loop\"\n)\n",
	} {
		path = filepath.Join(root, path)
		if err := os.MkdirAll(filepath.Dir(path), 0o777); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	for _, c := range []struct {
		tests bool
		want  string
	}{
		{false, "map[internal/deep/g:[] study:[loop sim]]"},
		{true, "map[internal/deep/g:[] study:[loop sim cmd/x]]"},
	} {
		g, err := read(root, "m", c.tests)
		if err != nil {
			t.Fatal(err)
		}
		if got := fmt.Sprint(g); got != c.want {
			t.Errorf("tests %v: %s, want %s", c.tests, got, c.want)
		}
	}
}
