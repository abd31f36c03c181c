package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/goccy/go-yaml"
	"github.com/rogpeppe/go-internal/testscript"
)

// scriptOf reads one of the files in scripts.
func scriptOf(t *testing.T, name string) string {
	t.Helper()
	text, err := os.ReadFile(filepath.Join("..", "..", "scripts", name))
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

func runScript(t *testing.T, script string) {
	t.Helper()
	path := filepath.Join(t.TempDir(), "spread-scripts.txtar")
	if err := os.WriteFile(path, []byte(script), 0o644); err != nil {
		t.Fatal(err)
	}
	testscript.Run(t, testscript.Params{Files: []string{path}, RequireExplicitExec: true})
}

const partsLoop = `-- loop.yaml --
loop: invented drive
symbols: {J: {value: 0.018, spread: 40 %}}
plant: {model: 0.31/(s*(J*s + 0.09))}
controller: {model: 9.2*(0.21*s + 1)/(0.011*s + 1), map: tustin}
timing: {rate: 200 Hz}
`

// The script that runs parts and merges them gives the bytes of one run.
func TestSpreadPartsScript(t *testing.T) {
	runScript(t, `exec steadytick spread loop.yaml --trials 60 --seed 2 --json one.json --html one.html
exec sh parts.sh loop.yaml 7 --trials 60 --seed 2
cmp spread.json one.json
cmp spread.html one.html
`+partsLoop+"-- parts.sh --\n"+scriptOf(t, "spread-parts.sh"))
}

// The command of the cluster's job, run for every index with fewer trials, writes the parts that merge.
func TestSpreadJobManifest(t *testing.T) {
	var job struct {
		Spec struct {
			Completions int    `yaml:"completions"`
			Mode        string `yaml:"completionMode"`
			Template    struct {
				Spec struct {
					Containers []struct {
						Command []string `yaml:"command"`
						Args    []string `yaml:"args"`
					} `yaml:"containers"`
				} `yaml:"spec"`
			} `yaml:"template"`
		} `yaml:"spec"`
	}
	if err := yaml.Unmarshal([]byte(scriptOf(t, "spread-job.yaml")), &job); err != nil {
		t.Fatal(err)
	}
	c := job.Spec.Template.Spec.Containers[0]
	if job.Spec.Mode != "Indexed" || strings.Join(c.Command, " ") != "sh -c" || len(c.Args) != 1 {
		t.Fatalf("%+v", job)
	}
	part := strings.Replace(c.Args[0], "1e7", "80", 1)
	var script strings.Builder
	for i := range job.Spec.Completions {
		fmt.Fprintf(&script, "env JOB_COMPLETION_INDEX=%d\nexec sh -c '%s'\n", i, part)
	}
	runScript(t, script.String()+`exec sh -c 'steadytick spread --merge parts/*.jsonl loop.yaml --json -'
cp stdout merged.json
exec steadytick spread loop.yaml --trials 80 --seed 1 --json -
cmp stdout merged.json
`+partsLoop)
}
