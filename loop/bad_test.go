package loop

import (
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// A bad file states each problem it must give in a comment of its own,
//
//	# want: line:column part of the message
//	# want: line:column part of the message ~ nearest
//
// in the order of the places. With ~ the suggestion must be exactly that.
var wanted = regexp.MustCompile(`(?m)# want: (\d+):(\d+) (.*)$`)

func openBeside(path string) func(string) ([]byte, error) {
	return func(name string) ([]byte, error) {
		return os.ReadFile(filepath.Join(filepath.Dir(path), name))
	}
}

func TestBadFiles(t *testing.T) {
	paths, _ := filepath.Glob("testdata/bad/*.yaml")
	if len(paths) < 30 {
		t.Fatalf("only %d bad files", len(paths))
	}
	for _, path := range paths {
		t.Run(filepath.Base(path), func(t *testing.T) {
			src, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			l, got := Parse(filepath.Base(path), src, openBeside(path))
			if (l == nil) != (len(got) > 0) {
				t.Errorf("loop %v with %d problems", l != nil, len(got))
			}
			want := wanted.FindAllStringSubmatch(string(src), -1)
			if len(want) == 0 {
				t.Error("the file wants nothing")
			}
			for i, w := range want {
				if i >= len(got) {
					t.Errorf("missing: %s", w[0])
					continue
				}
				part, near, strict := strings.Cut(w[3], " ~ ")
				place := fmt.Sprintf("%d:%d", got[i].Line, got[i].Column)
				if place != w[1]+":"+w[2] || !strings.Contains(got[i].Message, part) || strict && got[i].Nearest != near {
					t.Errorf("want %s\n got %s %s ~ %s", w[0], place, got[i].Message, got[i].Nearest)
				}
			}
			if len(got) > len(want) {
				t.Errorf("%d more problems:\n%v", len(got)-len(want), got[len(want):])
			}
			if t.Failed() || testing.Verbose() {
				t.Logf("\n%v", got)
			}
		})
	}
}

func TestGoodFiles(t *testing.T) {
	paths, _ := filepath.Glob("testdata/good/*.yaml")
	if len(paths) < 5 {
		t.Fatalf("only %d good files", len(paths))
	}
	for _, path := range paths {
		if _, problems := Load(path); len(problems) > 0 {
			t.Errorf("%v", problems)
		}
	}
}
