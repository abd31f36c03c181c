package charts

import (
	"context"
	"encoding/json"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/cdproto/log"
	"github.com/chromedp/cdproto/network"
	"github.com/chromedp/cdproto/runtime"
	"github.com/chromedp/chromedp"

	"steadytick/study"
)

// needBrowser returns a Chromium, or skips the test with the name of what is missing; where everything
// must be there (STEADYTICK_CHECK=1) it fails instead.
func needBrowser(t *testing.T) string {
	t.Helper()
	missing := func(what string) {
		t.Helper()
		if os.Getenv("STEADYTICK_CHECK") == "1" {
			t.Fatal("missing: " + what)
		}
		t.Skip("missing: " + what)
	}
	if !Embedded() {
		missing("the chart runtime, charts/runtime/" + runtimeName + " (make runtime)")
	}
	for _, name := range []string{"chromium", "chromium-browser", "google-chrome"} {
		if path, err := exec.LookPath(name); err == nil {
			return path
		}
	}
	missing("chromium")
	return ""
}

// tab is an offline browser tab that remembers what its pages ask for and complain about.
type tab struct {
	ctx                  context.Context
	mu                   sync.Mutex
	requests, complaints []string
}

func openTab(t *testing.T) *tab {
	t.Helper()
	path := needBrowser(t)
	options := append(slices.Clone(chromedp.DefaultExecAllocatorOptions[:]),
		chromedp.ExecPath(path), chromedp.NoSandbox, chromedp.DisableGPU, chromedp.UserDataDir(t.TempDir()),
		chromedp.Flag("disable-component-update", true),
		chromedp.Flag("host-resolver-rules", "MAP * ~NOTFOUND"))
	allocator, stop := chromedp.NewExecAllocator(context.Background(), options...)
	t.Cleanup(stop)
	ctx, cancel := chromedp.NewContext(allocator)
	t.Cleanup(func() {
		_ = chromedp.Cancel(ctx) // waits for the browser, so that its folder can be removed
		cancel()
	})
	b := &tab{ctx: ctx}
	if err := chromedp.Listen(ctx, b.listen); err != nil {
		t.Fatal(err)
	}
	if _, err := chromedp.Call(ctx, network.Enable, network.EnableParams{}); err != nil {
		t.Fatal(err)
	}
	_, err := chromedp.Call(ctx, network.EmulateNetworkConditionsByRule, network.EmulateNetworkConditionsByRuleParams{
		MatchedNetworkConditions: []*network.Conditions{{Offline: true, DownloadThroughput: -1, UploadThroughput: -1}}})
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func (b *tab) listen(event any) {
	b.mu.Lock()
	defer b.mu.Unlock()
	switch e := event.(type) {
	case *network.EventRequestWillBeSent:
		if !strings.HasPrefix(e.Request.URL, "data:") { // held in the page itself
			b.requests = append(b.requests, e.Request.URL)
		}
	case *runtime.EventConsoleAPICalled:
		text := "console " + string(e.Type)
		for _, a := range e.Args {
			text += " " + string(a.Value) + a.Description
		}
		b.complaints = append(b.complaints, text)
	case *runtime.EventExceptionThrown:
		text := "exception " + e.ExceptionDetails.Text
		if e.ExceptionDetails.Exception != nil {
			text += " " + e.ExceptionDetails.Exception.Description
		}
		b.complaints = append(b.complaints, text)
	case *log.EventEntryAdded:
		b.complaints = append(b.complaints, "log "+e.Entry.Text)
	}
}

// open writes the page to disk, opens it and returns its address.
func (b *tab) open(t *testing.T, page string, width int64) string {
	t.Helper()
	file := filepath.Join(t.TempDir(), "report.html")
	if err := os.WriteFile(file, []byte(page), 0o644); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(b.ctx, 120*time.Second)
	defer cancel()
	if err := chromedp.Do(ctx, chromedp.EmulateViewport(width, 900), chromedp.Navigate("file://"+file)); err != nil {
		t.Fatal(err)
	}
	return "file://" + file
}

func eval[T any](t *testing.T, b *tab, script string) T {
	t.Helper()
	ctx, cancel := context.WithTimeout(b.ctx, 120*time.Second)
	defer cancel()
	v, err := chromedp.Run(ctx, chromedp.Evaluate[T](script, chromedp.EvalAwaitPromise))
	if err != nil {
		t.Fatalf("%s: %v", script, err)
	}
	return v
}

// checkQuiet: nothing was asked of the network but the file, and nothing complained.
func (b *tab) checkQuiet(t *testing.T, address string) {
	t.Helper()
	b.mu.Lock()
	defer b.mu.Unlock()
	if !slices.Equal(b.requests, []string{address}) {
		t.Errorf("requests %q, want the file alone", b.requests)
	}
	if len(b.complaints) > 0 {
		t.Errorf("complaints: %q", b.complaints)
	}
	b.requests, b.complaints = nil, nil
}

// drawnScript counts, for each chart, the shapes in the colour of each named series, and looks for words
// outside the picture.
const drawnScript = `[...document.querySelectorAll('.chart')].map(el => {
  const chart = echarts.getInstanceByDom(el), svg = el.querySelector('svg');
  if (!chart || !svg) return {id: el.id, missing: ['an instance with a picture']};
  const frame = svg.getBoundingClientRect(), missing = [], clipped = [];
  const shapes = [...svg.querySelectorAll('path,circle,polyline,polygon,rect,use')].filter(s => { const r = s.getBoundingClientRect(); return r.width + r.height > 0; });
  const series = chart.getOption().series.filter(s => s.name);
  for (const s of series) {
    if (!s.data.length) { missing.push(s.name + ': data'); continue; }
    const model = chart.getModel().getSeriesByName(s.name)[0];
    const extent = chart._chartsMap[model.__viewId].group.getBoundingRect();
    if (!(extent.width + extent.height > 0)) missing.push(s.name + ': shapes');
    const colors = [s.lineStyle && s.lineStyle.color, s.itemStyle.color, s.itemStyle.borderColor];
    if (!shapes.some(p => colors.includes(p.getAttribute('stroke')) || colors.includes(p.getAttribute('fill')))) missing.push(s.name);
  }
  for (const t of svg.querySelectorAll('text')) {
    const r = t.getBoundingClientRect();
    if (r.left < frame.left - 1 || r.right > frame.right + 1 || r.top < frame.top - 1 || r.bottom > frame.bottom + 1) clipped.push(t.textContent);
  }
  return {id: el.id, missing, clipped, series: series.length, words: svg.querySelectorAll('text').length};
})`

type drawn struct {
	ID               string
	Missing, Clipped []string
	Series, Words    int
}

func checkDrawn(t *testing.T, b *tab, want []string) {
	t.Helper()
	var ids []string
	for _, d := range eval[[]drawn](t, b, drawnScript) {
		ids = append(ids, d.ID)
		if len(d.Missing) > 0 || d.Series == 0 || d.Words < 4 {
			t.Errorf("chart %s: %d series, %d words, not drawn: %q", d.ID, d.Series, d.Words, d.Missing)
		}
		if len(d.Clipped) > 0 {
			t.Errorf("chart %s: words cut off: %q", d.ID, d.Clipped)
		}
	}
	if !slices.Equal(ids, want) {
		t.Errorf("charts %q, want %q", ids, want)
	}
}

const figuresScript = `Object.fromEntries([...document.querySelectorAll('[data-figure]')].map(e =>
  [e.dataset.figure, [e.dataset.value || '', e.dataset.scale || '', e.textContent]]))`

func TestReportInTheBrowser(t *testing.T) {
	b := openTab(t)
	for _, c := range []struct {
		name   string
		result *study.Compare
		inputs int
		width  int64
	}{{"calm, wide", winch(), 2, 1280}, {"calm, narrow", winch(), 2, 400}, {"stormy, wide", stormy(), 1, 1280}, {"stormy, narrow", stormy(), 1, 400}} {
		t.Run(c.name, func(t *testing.T) {
			address := b.open(t, render(t, c.result), c.width)
			checkDrawn(t, b, allIDs(c.inputs))
			have := map[string]shown{}
			for path, f := range eval[map[string][3]string](t, b, figuresScript) {
				have[path] = shown{f[0], f[1], f[2]}
			}
			checkFigures(t, have, c.result, notFigure)
			if w := eval[int64](t, b, `document.scrollingElement.scrollWidth`); w > c.width {
				t.Errorf("the page is %d pixels wide on a screen of %d", w, c.width)
			}
			if got := eval[string](t, b, `document.querySelector('h1').textContent`); got != c.result.Loop {
				t.Errorf("heading %q, want %q", got, c.result.Loop)
			}
			if got := eval[string](t, b, `document.getElementById('loop-file').textContent`); got != c.result.LoopFile {
				t.Errorf("loop file %q, want %q", got, c.result.LoopFile)
			}
			b.checkQuiet(t, address)
		})
	}
}

func TestReportAnswersTheReader(t *testing.T) {
	b := openTab(t)
	address := b.open(t, render(t, stormy()), 1280)
	// A key hides its curve in all charts of the input.
	hidden := eval[[]bool](t, b, `(() => { [...document.querySelectorAll('#input-1 .key')].find(k => k.dataset.curve === 'half rate').click();
		return ['response', 'error', 'effort'].map(n => echarts.getInstanceByDom(document.getElementById('input-1-' + n)).getOption().legend[0].selected['half rate']) })()`)
	if !slices.Equal(hidden, []bool{false, false, false}) {
		t.Errorf("after the click the curve is shown: %v", hidden)
	}
	// A zoom in time goes to the other charts of the input, and not further.
	starts := eval[[]float64](t, b, `(() => { const at = id => echarts.getInstanceByDom(document.getElementById(id));
		at('input-1-error').dispatchAction({type: 'dataZoom', dataZoomIndex: 0, start: 20, end: 30});
		return ['input-1-response', 'input-1-error', 'input-1-added', 'input-1-effort', 'loop-gain'].map(id => at(id).getOption().dataZoom[0].start) })()`)
	if !slices.Equal(starts, []float64{20, 20, 20, 20, 0}) {
		t.Errorf("zooms start at %v", starts)
	}
	// The tooltip shows hostile names as text.
	type tooltip struct {
		Text   string
		Markup int
	}
	tip := eval[tooltip](t, b, `(() => { const el = document.getElementById('input-1-response');
		echarts.getInstanceByDom(el).dispatchAction({type: 'showTip', x: 500, y: 150});
		const tip = el.querySelector('.tip');
		return {Text: tip ? tip.textContent : '', Markup: tip ? tip.querySelectorAll('script,i').length : -1} })()`)
	if !strings.Contains(tip.Text, hostile) || !strings.Contains(tip.Text, "time ") || tip.Markup != 0 {
		t.Errorf("tooltip %+v", tip)
	}
	if strings.Contains(tip.Text, "half rate") {
		t.Error("the tooltip speaks of a hidden curve")
	}
	b.checkQuiet(t, address)
}

func TestReportPrints(t *testing.T) {
	b := openTab(t)
	address := b.open(t, render(t, winch()), 1280)
	before := eval[json.RawMessage](t, b, `[...document.querySelectorAll('.chart svg')].map(s => s.getAttribute('width') + ' ' + s.getAttribute('height'))`)
	ctx, cancel := context.WithTimeout(b.ctx, 120*time.Second)
	defer cancel()
	pdf, err := chromedp.Run(ctx, chromedp.PrintToPDF(chromedp.PDFPreferCSSPageSize()))
	if err != nil {
		t.Fatal(err)
	}
	// Pages for figures, two inputs, frequency, poles, rates and method; each holds vectors, not pictures.
	if pages := strings.Count(string(pdf), "/Type /Page\n"); pages < 6 || pages > 14 {
		t.Errorf("%d pages", pages)
	}
	if strings.Contains(string(pdf), "/Subtype /Image") {
		t.Error("a chart is printed as a picture of dots")
	}
	// The screen is as it was.
	after := eval[json.RawMessage](t, b, `[...document.querySelectorAll('.chart svg')].map(s => s.getAttribute('width') + ' ' + s.getAttribute('height'))`)
	if string(before) != string(after) {
		t.Errorf("chart sizes after printing %s, before %s", after, before)
	}
	b.checkQuiet(t, address)
}
