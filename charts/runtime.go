package charts

import (
	"embed"
	"io/fs"
	"regexp"
)

// The pattern always matches package.json, so that the package builds before the runtime is fetched; it
// matches echarts.min.js when it is there, and never the folder node_modules.
//
//go:embed runtime/*.js*
var runtimeFiles embed.FS

const runtimeName = "echarts.min.js"

// Embedded tells whether the chart runtime was there when the program was built. When it is false a
// report loads the runtime from RuntimeAddress, and so needs the network to show its charts.
func Embedded() bool {
	_, err := fs.Stat(runtimeFiles, "runtime/"+runtimeName)
	return err == nil
}

// runtimeScript returns the text of the embedded runtime, safe inside a script element, or "" without one.
func runtimeScript() string {
	text, err := runtimeFiles.ReadFile("runtime/" + runtimeName)
	if err != nil {
		return ""
	}
	return safeScript(string(text))
}

var endsScript = regexp.MustCompile(`(?i)<(/script|!--)`)

// safeScript breaks the two character sequences that could end a script element early or put the HTML
// parser in its escaped state (HTML standard, "Restrictions for contents of script elements"). Both can
// stand in JavaScript only inside strings and regular expressions, where the backslash changes nothing.
func safeScript(js string) string {
	return endsScript.ReplaceAllString(js, `<\$1`)
}
