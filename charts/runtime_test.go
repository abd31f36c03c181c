package charts

import (
	"bytes"
	"html/template"
	"os"
	"strings"
	"testing"
)

func TestEmbeddedTellsWhatIsThere(t *testing.T) {
	_, err := os.Stat("runtime/" + runtimeName)
	if Embedded() != (err == nil) {
		t.Errorf("Embedded() = %v, the file: %v", Embedded(), err)
	}
	if Embedded() != (runtimeScript() != "") {
		t.Error("Embedded and the script disagree")
	}
	entries, err := runtimeFiles.ReadDir("runtime")
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if e.IsDir() {
			t.Errorf("the folder %s is embedded", e.Name())
		}
	}
}

// Without the runtime the page loads it from go-echarts' default address, and only then may it load anything.
func TestPageWithoutRuntime(t *testing.T) {
	v, err := newView(winch())
	if err != nil {
		t.Fatal(err)
	}
	v.Runtime, v.RuntimeAddress = "", RuntimeAddress()
	var b bytes.Buffer
	if err := page.Execute(&b, v); err != nil {
		t.Fatal(err)
	}
	if !strings.HasPrefix(RuntimeAddress(), "https://") || !strings.HasSuffix(RuntimeAddress(), "/"+runtimeName) {
		t.Errorf("address %q", RuntimeAddress())
	}
	if !strings.Contains(b.String(), `<script src="`+RuntimeAddress()+`">`) {
		t.Error("the page does not load the runtime")
	}
	v.Runtime, v.RuntimeAddress = template.JS("var echarts"), ""
	b.Reset()
	if err := page.Execute(&b, v); err != nil {
		t.Fatal(err)
	}
	if strings.Contains(b.String(), " src=") || !strings.Contains(b.String(), "default-src 'none'") {
		t.Error("a page with its runtime inside is not closed to the network")
	}
}

// Any registry mirror must serve: the lock holds checksums and no addresses.
func TestLockNamesNoHost(t *testing.T) {
	lock, err := os.ReadFile("runtime/package-lock.json")
	if err != nil {
		t.Fatal(err)
	}
	for _, bad := range []string{"://", `"resolved"`} {
		if bytes.Contains(lock, []byte(bad)) {
			t.Errorf("the lock file contains %s", bad)
		}
	}
	if !bytes.Contains(lock, []byte(`"integrity": "sha512-`)) {
		t.Error("the lock file pins no checksum")
	}
}
