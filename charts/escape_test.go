package charts

import (
	"encoding/json"
	"regexp"
	"strings"
	"testing"
)

// The scripts of a page: the runtime (or its address) and the page's own.
var scriptPattern = regexp.MustCompile(`(?is)<script[^>]*>(.*?)</script>`)

func TestHostileNamesStayText(t *testing.T) {
	page := render(t, stormy())
	scripts := scriptPattern.FindAllStringSubmatch(page, -1)
	if len(scripts) != 2 {
		t.Fatalf("%d script elements, want 2", len(scripts))
	}
	rest := scriptPattern.ReplaceAllString(page, "")
	for _, tag := range []string{"<script", "</script", "<b>bold", "<i>mm", "<!--"} {
		if strings.Contains(strings.ToLower(rest), tag) {
			t.Errorf("%s stands in the page as markup", tag)
		}
	}
	own := scripts[1][1]
	if strings.Contains(own, "<b>bold") || strings.Contains(own, "\u2028") {
		t.Error("names stand unescaped in the chart options")
	}
	list, _, ok := strings.Cut(strings.TrimPrefix(own, "const drawings = "), ";\n")
	if !ok {
		t.Fatal("no end of the drawings")
	}
	var drawings []struct {
		ID     string `json:"id"`
		Option struct {
			Series []struct {
				Name string `json:"name"`
			} `json:"series"`
		} `json:"option"`
	}
	if err := json.Unmarshal([]byte(list), &drawings); err != nil {
		t.Fatal(err)
	}
	found := false
	for _, d := range drawings {
		for _, s := range d.Option.Series {
			found = found || s.Name == hostile
		}
	}
	if !found {
		t.Error("the hostile curve name does not come back from the options as it was")
	}
	if !strings.Contains(page, "&lt;/script&gt;&lt;script&gt;alert(") {
		t.Error("the loop file is not there, escaped")
	}
}

func TestSafeScript(t *testing.T) {
	for in, want := range map[string]string{
		`a="</script>"`:  `a="<\/script>"`,
		`a="</ScRiPt >"`: `a="<\/ScRiPt >"`,
		`a="<!--"`:       `a="<\!--"`,
		`a<b/script`:     `a<b/script`,
	} {
		if got := safeScript(in); got != want {
			t.Errorf("%q becomes %q, want %q", in, got, want)
		}
	}
}
