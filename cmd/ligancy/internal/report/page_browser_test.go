package report

import (
	"context"
	"encoding/json"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/cdproto/cdp"
	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/cdproto/log"
	"github.com/chromedp/cdproto/network"
	"github.com/chromedp/cdproto/runtime"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"
)

// browser is a page in a real browser, with the network off, and everything
// that went wrong there.
type browser struct {
	context.Context
	t testing.TB

	mu       sync.Mutex
	problems []string
}

// chromium is the one browser that all tests open their pages in. Tests are
// skipped where there is none.
func chromium(t testing.TB) context.Context {
	t.Helper()
	if testing.Short() {
		t.Skip("starts a browser")
	}
	path, err := exec.LookPath("chromium")
	if err != nil {
		t.Skip("no Chromium here: the page was not opened in a browser (Debian: apt-get install chromium)")
	}
	startBrowser.Do(func() {
		opts := append(chromedp.DefaultExecAllocatorOptions[:], chromedp.ExecPath(path), chromedp.NoSandbox, chromedp.DisableGPU,
			chromedp.Flag("disable-quic", true), chromedp.Flag("disable-component-update", true), chromedp.Flag("hide-scrollbars", true),
			chromedp.ProxyServer("127.0.0.1:9")) // nobody listens there: the network is off
		alloc, stop := chromedp.NewExecAllocator(context.Background(), opts...)
		ctx, cancel := chromedp.NewContext(alloc)
		theBrowser, stopBrowser = ctx, func() { cancel(); stop() }
		browserError = chromedp.Do(ctx)
	})
	if browserError != nil {
		t.Fatal(browserError)
	}
	return theBrowser
}

var (
	startBrowser sync.Once
	theBrowser   context.Context
	stopBrowser  func()
	browserError error
)

// TestMain closes the browser, and with it its folder.
func TestMain(m *testing.M) {
	code := m.Run()
	if stopBrowser != nil {
		stopBrowser()
	}
	os.Exit(code)
}

// open opens a page from disk.
func open(t *testing.T, html []byte, width, height int64, dark bool) *browser {
	t.Helper()
	file := filepath.Join(t.TempDir(), "report.html")
	if err := os.WriteFile(file, html, 0o666); err != nil {
		t.Fatal(err)
	}
	b := &browser{t: t}
	ctx, cancel := chromedp.NewContext(chromium(t), chromedp.WithListener(b.hear))
	t.Cleanup(cancel)
	ctx, cancel = context.WithTimeout(ctx, 90*time.Second)
	t.Cleanup(cancel)
	b.Context = ctx
	scheme := "light"
	if dark {
		scheme = "dark"
	}
	call(b, network.Enable, network.EnableParams{})
	call(b, log.Enable, cdp.Empty{})
	b.media("", scheme)
	b.run(chromedp.EmulateViewport(width, height), chromedp.Navigate("file://"+file))
	if _, err := chromedp.Run(ctx, chromedp.Evaluate[bool]("document.fonts.ready.then(() => true)", chromedp.EvalAwaitPromise)); err != nil {
		t.Fatal(err)
	}
	return b
}

// call sends one command of the protocol.
func call[P, R any](b *browser, cmd cdp.Command[P, R], params P) R {
	b.t.Helper()
	r, err := chromedp.Call(b.Context, cmd, params)
	if err != nil {
		b.t.Fatalf("%s: %v", cmd.Method, err)
	}
	return r
}

// media sets what the reader asks for: a medium, light or dark, and rest.
func (b *browser) media(medium, scheme string) {
	b.t.Helper()
	call(b, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Media: medium, Features: []*emulation.MediaFeature{
		{Name: "prefers-color-scheme", Value: scheme}, {Name: "prefers-reduced-motion", Value: "reduce"}}})
}

// hear notes errors and every request that is not for the page itself.
func (b *browser) hear(event any) {
	problem := ""
	switch e := event.(type) {
	case *runtime.EventExceptionThrown:
		problem = "exception: " + e.ExceptionDetails.Text
		if x := e.ExceptionDetails.Exception; x != nil {
			problem += " " + x.Description
		}
	case *runtime.EventConsoleAPICalled:
		if e.Type == runtime.ConsoleAPICalledTypeError || e.Type == runtime.ConsoleAPICalledTypeWarning {
			problem = fmt.Sprintf("console: %v", e.Args)
		}
	case *log.EventEntryAdded:
		if e.Entry.Level == log.EntryLevelError || e.Entry.Level == log.EntryLevelWarning {
			problem = "log: " + e.Entry.Text
		}
	case *network.EventRequestWillBeSent:
		if u := e.Request.URL; !strings.HasPrefix(u, "file:") && !strings.HasPrefix(u, "data:") {
			problem = "request: " + u
		}
	}
	if problem != "" {
		b.mu.Lock()
		defer b.mu.Unlock()
		b.problems = append(b.problems, problem)
	}
}

func (b *browser) run(steps ...chromedp.Action[chromedp.Void]) {
	b.t.Helper()
	if err := chromedp.Do(b.Context, steps...); err != nil {
		b.t.Fatal(err)
	}
}

// clean fails the test if anything went wrong in the browser.
func (b *browser) clean() {
	b.t.Helper()
	b.mu.Lock()
	defer b.mu.Unlock()
	for _, p := range b.problems {
		b.t.Error("in the browser: ", p)
	}
}

// eval evaluates an expression and returns what it gives.
func eval[T any](b *browser, js string) T {
	b.t.Helper()
	text, err := chromedp.Run(b.Context, chromedp.Evaluate[string]("JSON.stringify("+js+")"))
	if err != nil {
		b.t.Fatalf("%s: %v", js, err)
	}
	var v T
	if err := json.Unmarshal([]byte(text), &v); err != nil {
		b.t.Fatalf("%s gives %s", js, text)
	}
	return v
}

// keep writes a screenshot where the developer asked for it: LIGANCY_SHOTS=folder.
func (b *browser) keep(name string) {
	folder := os.Getenv("LIGANCY_SHOTS")
	if folder == "" {
		return
	}
	png, err := chromedp.Run(b.Context, chromedp.FullScreenshot(100))
	if err != nil {
		b.t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(folder, name+".png"), png, 0o666); err != nil {
		b.t.Fatal(err)
	}
}

// seen is what a browser shows of one figure.
type seen struct {
	ID            string
	Width, Height float64
	Marks         int
	Outside       []string // texts that leave the drawing
	Overlapping   []string // texts that lie on one another
}

const lookAtFigures = `Array.from(document.querySelectorAll('svg.fig')).filter(s => s.getBoundingClientRect().width > 0).map(s => {
  const box = s.getBoundingClientRect();
  const texts = Array.from(s.querySelectorAll('text')).filter(t => getComputedStyle(t).visibility !== 'hidden').map(t => [t.textContent, t.getBoundingClientRect()]);
  const outside = texts.filter(([w, r]) => r.left < box.left - 2.5 || r.right > box.right + 5 || r.top < box.top - 1 || r.bottom > box.bottom + 2).map(t => t[0]);
  const overlapping = [];
  texts.forEach(([a, r], i) => texts.slice(i + 1).forEach(([b, q]) => {
    const w = Math.min(r.right, q.right) - Math.max(r.left, q.left), h = Math.min(r.bottom, q.bottom) - Math.max(r.top, q.top);
    if (w > 2 && h > 0.45 * Math.min(r.height, q.height)) overlapping.push(a + ' / ' + b);
  }));
  return {ID: s.closest('figure').id, Width: box.width, Height: box.height, Marks: s.querySelectorAll('path').length, Outside: outside, Overlapping: overlapping};
})`

// The page of every gallery study opens from disk with the network off, without
// an error, at every width, and nothing in its figures is clipped or overlaps.
func TestPageInABrowser(t *testing.T) {
	chromium(t)
	for _, name := range []string{"clam", "oyster", "crab"} {
		html := pageOf(t, galleryDocument(t, name))
		widths := []int64{360, 800, 1600}
		if name != "clam" { // at 1600 figures are those of 800
			widths = widths[:2]
		}
		for _, width := range widths {
			t.Run(fmt.Sprintf("%s at %d", name, width), func(t *testing.T) {
				b := open(t, html, width, 900, false)
				if w := eval[float64](b, "document.documentElement.scrollWidth"); w > float64(width) {
					t.Errorf("the page is %v wide", w)
				}
				figures := eval[[]seen](b, lookAtFigures)
				if len(figures) < 6 {
					t.Errorf("%d figures are shown", len(figures))
				}
				for _, f := range figures {
					if f.Width < 250 || f.Height < 60 || f.Marks < 3 {
						t.Errorf("%s is %v × %v with %d paths", f.ID, f.Width, f.Height, f.Marks)
					}
					if len(f.Outside)+len(f.Overlapping) > 0 {
						t.Errorf("%s: outside %q, overlapping %q", f.ID, f.Outside, f.Overlapping)
					}
				}
				if !eval[bool](b, "document.fonts.check(\"17px 'STIX Two Text'\") && document.fonts.check(\"13px 'Inter'\")") {
					t.Error("the embedded typefaces are not in use")
				}
				b.clean()
				b.keep(fmt.Sprintf("%s-%d", name, width))
			})
		}
	}
}

// Pointing, keys, buttons and links do what they say.
func TestPageIsRead(t *testing.T) {
	html := pageOf(t, galleryDocument(t, "clam"))
	b := open(t, html, 800, 900, false)
	readout := func() string { return eval[string](b, "document.getElementById('readout').textContent") }

	// Keys step through the tested levels and the curves.
	b.run(chromedp.Focus(chromedp.CSS("[data-keys]")))
	for range 7 {
		b.run(chromedp.KeyEvent(kb.ArrowRight)) // right
	}
	if got := readout(); !strings.HasPrefix(got, "at 9 torr, pH 7.6: measured A 0.798, B 0.787, C 0.796 (rows ") {
		t.Errorf("after seven steps to the right: %q", got)
	}
	b.run(chromedp.KeyEvent(kb.ArrowDown)) // down
	got := readout()
	for _, want := range []string{"at 9 torr, pH 7.0: measured A 0.480, B 0.532, C 0.494 (rows ", "concerted, L differs 0.50", "nH 2.94", "stepwise 0.50", "residuals "} {
		if !strings.Contains(got, want) {
			t.Errorf("%q does not say %q", got, want)
		}
	}
	if n := eval[int](b, "Array.from(document.querySelectorAll('.hair')).filter(h => h.getAttribute('visibility') === 'visible' && h.getBoundingClientRect().height > 0).length"); n < 4 {
		t.Errorf("the hairline runs through %d fields", n)
	}
	if live := eval[string](b, "document.getElementById('readout').getAttribute('aria-live')"); live != "polite" {
		t.Errorf("the readout is aria-live=%q", live)
	}

	// A button shows a rival; the link remembers everything.
	shown := "Array.from(document.querySelectorAll('#fig-curves svg.wide .rival')).filter(g => getComputedStyle(g).visibility === 'visible').map(g => g.dataset.m)"
	before := eval[[]string](b, shown)
	b.run(chromedp.Click(`//button[contains(@class,"rival-button") and contains(.,"Hill equation")]`))
	if after := eval[[]string](b, shown); len(after) != len(before)+1 {
		t.Errorf("shown before the button: %q, after: %q", before, after)
	}
	if pressed := eval[[]string](b, "Array.from(document.querySelectorAll('.rival-button[aria-pressed=true]')).map(b => b.textContent.trim())"); len(pressed) != 2 {
		t.Errorf("pressed buttons: %q", pressed)
	}
	hash := eval[string](b, "location.hash")
	for _, want := range []string{"show=stepwise,Hill%20equation", "at=9", "curve=1"} {
		if !strings.Contains(hash, want) {
			t.Errorf("the link %q does not hold %q", hash, want)
		}
	}
	b.run(chromedp.Reload())
	if again := eval[[]string](b, shown); len(again) != 2 || !strings.Contains(readout(), "at 9 torr, pH 7.0") {
		t.Errorf("the link shows %q and says %q", again, readout())
	}

	// Escape ends reading; a number says what it is; a mechanism that is
	// pointed at lays its residuals over the first figure.
	b.run(chromedp.Focus(chromedp.CSS("[data-keys]")), chromedp.KeyEvent(kb.Escape))
	if !eval[bool](b, "document.getElementById('readout').hidden") {
		t.Error("Escape leaves the readout")
	}
	b.run(chromedp.Focus(chromedp.CSS("#say .say")))
	if got := readout(); !strings.Contains(got, "half saturation, pH 7.6: 5.44 torr (5.38 to 5.50), 95 % profile interval") || !strings.Contains(got, "of quantities.csv") {
		t.Errorf("a number says %q", got)
	}
	b.run(chromedp.Focus(chromedp.CSS("#stand .peek")))
	if n := eval[int](b, "document.querySelector('#fig-curves svg.wide .residuals-of').children.length"); n != 1 {
		t.Error("pointing at a mechanism does not show its residuals")
	}

	// The table that stands for the figure.
	if eval[bool](b, "document.getElementById('figure-table').getBoundingClientRect().height > 0") {
		t.Error("the figure's table is open at first")
	}
	b.run(chromedp.Click(chromedp.CSS("#as-table")))
	if !eval[bool](b, "document.getElementById('figure-table').getBoundingClientRect().height > 100 && document.getElementById('as-table').getAttribute('aria-expanded') === 'true'") {
		t.Error("the button does not open the figure's table")
	}
	b.clean()
	b.keep("clam-read")
}

// Mouse and finger read the figure where they point.
func TestPageIsPointedAt(t *testing.T) {
	b := open(t, pageOf(t, galleryDocument(t, "clam")), 360, 800, false)
	b.run(chromedp.ScrollIntoView(chromedp.CSS("#fig-curves svg.narrow")))
	at := eval[[2]float64](b, `(() => { const s = document.querySelector('#fig-curves svg.narrow'), g = s.querySelector('.axis').dataset, r = s.getBoundingClientRect();
	  const x = Number(g.x0) + (Math.log10(12) - Number(g.l0)) / (Number(g.l1) - Number(g.l0)) * (Number(g.x1) - Number(g.x0));
	  return [r.left + x * r.width / s.viewBox.baseVal.width, r.top + 80 * r.height / s.viewBox.baseVal.height]; })()`)
	b.run(chromedp.MouseClickXY(at[0], at[1]))
	if got := eval[string](b, "document.getElementById('readout').textContent"); !strings.HasPrefix(got, "at 12 torr, pH 7.") {
		t.Errorf("pointing at 12 torr says %q", got)
	}
	if gap := eval[float64](b, "document.getElementById('readout').getBoundingClientRect().top - document.querySelector('#fig-curves svg.narrow').getBoundingClientRect().bottom"); gap < 0 || gap > 40 {
		t.Errorf("the readout stands %v below the figure", gap)
	}
	b.clean()
	b.keep("clam-pointed-360")
}

// contrast is the least contrast of visible text against what lies behind it.
const contrast = `(() => {
  const lum = c => { const v = c.match(/[\d.]+/g).slice(0, 3).map(x => { x /= 255; return x <= 0.04045 ? x / 12.92 : Math.pow((x + 0.055) / 1.055, 2.4); }); return 0.2126 * v[0] + 0.7152 * v[1] + 0.0722 * v[2]; };
  const ground = lum(getComputedStyle(document.documentElement).backgroundColor);
  const out = [];
  document.querySelectorAll('body *').forEach(e => {
    if (!Array.from(e.childNodes).some(n => n.nodeType === 3 && n.textContent.trim()) || e.getBoundingClientRect().width === 0 || e.closest('script,style,.skip')) return;
    const s = getComputedStyle(e), c = e instanceof SVGElement ? s.fill : s.color;
    if (s.visibility === 'hidden' || !/^rgb/.test(c)) return;
    const a = lum(c), r = (Math.max(a, ground) + 0.05) / (Math.min(a, ground) + 0.05);
    if (r < 4.5) out.push(e.textContent.slice(0, 30) + ' ' + c + ' ' + r.toFixed(2));
  });
  return out;
})()`

// Dark where the reader asks for it, light in print, legible in both
// (WCAG 2.2, 1.4.3: 4.5 to 1), with the tables that stand for figures printed.
func TestPageDarkAndPrinted(t *testing.T) {
	html := pageOf(t, galleryDocument(t, "oyster"))
	for _, dark := range []bool{false, true} {
		b := open(t, html, 800, 900, dark)
		want := "rgb(255, 255, 255)"
		if dark {
			want = "rgb(17, 22, 28)"
		}
		background := "getComputedStyle(document.documentElement).backgroundColor"
		if got := eval[string](b, background); got != want {
			t.Errorf("dark %v: the ground is %s", dark, got)
		}
		for _, low := range eval[[]string](b, contrast) {
			t.Errorf("dark %v: contrast of %s", dark, low)
		}
		b.keep(fmt.Sprintf("oyster-dark-%v", dark))
		b.media("print", "dark")
		if got := eval[string](b, background); got != "rgb(255, 255, 255)" {
			t.Errorf("printed ground is %s", got)
		}
		if !eval[bool](b, "document.getElementById('figure-table').getBoundingClientRect().height > 100") {
			t.Error("print does not show the figure's table")
		}
		b.media("", "dark")
		pdf, err := chromedp.Run(b.Context, chromedp.PrintToPDF(chromedp.PDFPreferCSSPageSize()))
		if err != nil {
			t.Fatal(err)
		}
		if len(pdf) < 50_000 || string(pdf[:5]) != "%PDF-" {
			t.Errorf("printed %d bytes", len(pdf))
		}
		if folder := os.Getenv("LIGANCY_SHOTS"); folder != "" {
			if err := os.WriteFile(filepath.Join(folder, "oyster-printed.pdf"), pdf, 0o666); err != nil {
				t.Fatal(err)
			}
		}
		b.clean()
	}
}

// What people rely on who do not see the page, or do not use a mouse (WCAG 2.2
// AA): a language, landmarks, headings in order, names for all that can be
// operated, tables with heads, targets of 24 px, unique identifiers.
func TestPageForEverybody(t *testing.T) {
	b := open(t, pageOf(t, galleryDocument(t, "clam")), 800, 900, false)
	for what, js := range map[string]string{
		"language":     `document.documentElement.lang === 'en'`,
		"landmarks":    `['header', 'nav', 'main', 'footer'].every(n => document.querySelectorAll('body > ' + n).length === 1)`,
		"one h1":       `document.querySelectorAll('h1').length === 1`,
		"title":        `document.title.length > 0`,
		"skip link":    `document.querySelector('a.skip').getAttribute('href') === '#say' && document.getElementById('say') !== null`,
		"section name": `Array.from(document.querySelectorAll('section')).every(s => document.getElementById(s.getAttribute('aria-labelledby')).textContent.length > 0)`,
	} {
		if !eval[bool](b, js) {
			t.Error("missing: ", what)
		}
	}
	for what, js := range map[string]string{
		"headings that skip a level":             `(() => { let last = 1; return Array.from(document.querySelectorAll('h1,h2,h3,h4')).filter(h => { const n = Number(h.tagName[1]), bad = n > last + 1; last = n; return bad; }).map(h => h.textContent); })()`,
		"identifiers used twice":                 `(() => { const all = {}; document.querySelectorAll('[id]').forEach(e => all[e.id] = (all[e.id] || 0) + 1); return Object.keys(all).filter(k => all[k] > 1); })()`,
		"controls without a name":                `Array.from(document.querySelectorAll('button,a,[tabindex]')).filter(e => !(e.textContent.trim() || e.getAttribute('aria-label'))).map(e => e.outerHTML.slice(0, 80))`,
		"tables without a caption or heads":      `Array.from(document.querySelectorAll('table')).filter(t => !t.caption || !t.querySelector('thead th[scope=col]')).map(t => t.textContent.slice(0, 40))`,
		"figures without a name":                 `Array.from(document.querySelectorAll('svg.fig')).filter(s => s.getAttribute('role') !== 'img' || !document.getElementById(s.getAttribute('aria-labelledby').split(' ')[0]).textContent).map(s => s.parentNode.id)`,
		"targets below 24 px":                    `Array.from(document.querySelectorAll('button,nav a')).filter(e => e.getBoundingClientRect().height > 0 && e.getBoundingClientRect().height < 23.5).map(e => e.textContent)`,
		"links to nowhere":                       `Array.from(document.querySelectorAll('a[href^="#"]')).filter(a => !document.getElementById(a.getAttribute('href').slice(1))).map(a => a.getAttribute('href'))`,
		"regions that cannot be reached by keys": `Array.from(document.querySelectorAll('.scroll')).filter(s => s.tabIndex < 0).length ? ['scroll'] : []`,
	} {
		if found := eval[[]string](b, js); len(found) > 0 {
			t.Errorf("%s: %q", what, found)
		}
	}
	// Focus can be seen.
	b.run(chromedp.KeyEvent(kb.Tab), chromedp.KeyEvent(kb.Tab))
	if s := eval[string](b, "getComputedStyle(document.activeElement).outlineStyle"); s == "none" {
		t.Error("focus cannot be seen")
	}
	// Nothing moves by itself where the reader asks for rest.
	if s := eval[string](b, "getComputedStyle(document.documentElement).scrollBehavior"); s != "auto" {
		t.Errorf("scrolling is %s although the reader asked for rest", s)
	}
	b.clean()
}
