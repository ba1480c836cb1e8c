package page

import (
	"context"
	"encoding/json"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/cdproto/cdp"
	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/cdproto/network"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"

	"maskpair/testdata/crosscheck/outside"
)

// written is a report page with the JSON of the same run.
type written struct {
	dir    string // with the layouts, decks and masks
	page   string // path
	report map[string]any
}

// write runs the program on the scene.
func write(t *testing.T) *written {
	t.Helper()
	s, err := makeScene()
	if err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	path := func(name string) string { return filepath.Join(dir, name) }
	for name, data := range map[string][]byte{"before.gds": s.before, "layout.gds": s.layout, "deck.toml": []byte(s.deck), "anchors.toml": []byte(s.anchors)} {
		if err := os.WriteFile(path(name), data, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	program := outside.Maskpair(t)
	run := func(args ...string) {
		t.Helper()
		cmd := exec.Command(program, args...)
		cmd.Dir = dir
		if out, err := cmd.CombinedOutput(); err != nil && cmd.ProcessState.ExitCode() != 1 { // something is unresolved
			t.Fatalf("%v: %v\n%s", args, err, out)
		}
	}
	run("decompose", "before.gds", "--deck", "deck.toml", "--anchors", "anchors.toml", "--output", "masks.gds")
	run("decompose", "layout.gds", "--deck", "deck.toml", "--anchors", "anchors.toml", "--baseline", "masks.gds", "--report", "report.json", "--html", "report.html")
	w := &written{dir: dir, page: path("report.html")}
	data, err := os.ReadFile(path("report.json"))
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &w.report); err != nil {
		t.Fatal(err)
	}
	return w
}

// browser is Chromium with what it said.
type browser struct {
	ctx      context.Context
	mu       sync.Mutex
	spoke    []string // what came to the console
	requests []string
}

type action = chromedp.Action[chromedp.Void]

// start starts Chromium without a window; it needs no network.
func start(t *testing.T) *browser {
	t.Helper()
	outside.Packages(t, "chromium")
	opts := append(chromedp.DefaultExecAllocatorOptions[:],
		chromedp.NoSandbox, chromedp.Flag("disable-gpu", true), chromedp.Flag("disable-quic", true),
		chromedp.Flag("disable-component-update", true), chromedp.UserDataDir(t.TempDir()))
	alloc, stop := chromedp.NewExecAllocator(context.Background(), opts...)
	t.Cleanup(stop)
	ctx, cancel := chromedp.NewContext(alloc)
	t.Cleanup(cancel)
	b := &browser{ctx: ctx}
	messages := chromedp.Console(ctx)
	go func() {
		for m, err := range messages {
			if err != nil {
				return
			}
			b.mu.Lock()
			b.spoke = append(b.spoke, m.String())
			b.mu.Unlock()
		}
	}()
	b.do(t, chromedp.Func(func(ctx context.Context, target *chromedp.Target) error {
		_, err := cdp.Call(ctx, target, network.Enable, network.EnableParams{})
		return err
	}))
	requests := chromedp.Events(ctx, network.RequestWillBeSent)
	go func() {
		for e, err := range requests {
			if err != nil {
				return
			}
			b.mu.Lock()
			b.requests = append(b.requests, e.Request.URL)
			b.mu.Unlock()
		}
	}()
	return b
}

func (b *browser) do(t *testing.T, actions ...action) {
	t.Helper()
	if err := chromedp.Do(b.ctx, actions...); err != nil {
		t.Fatal(err)
	}
}

// ask evaluates a script and gives its value.
func ask[T any](t *testing.T, b *browser, script string) T {
	t.Helper()
	out, err := chromedp.Run(b.ctx, chromedp.Evaluate[T](script))
	if err != nil {
		t.Fatalf("%v\n%s", err, script)
	}
	return out
}

// media sets whether the page is on a screen or on paper, and in which colours.
func media(kind, scheme string) action {
	return chromedp.Func(func(ctx context.Context, t *chromedp.Target) error {
		_, err := cdp.Call(ctx, t, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Media: kind,
			Features: []*emulation.MediaFeature{{Name: "prefers-color-scheme", Value: scheme}}})
		return err
	})
}

// shot leaves a screenshot of all of the page, where a folder is named.
func (b *browser) shot(t *testing.T, name string) {
	dir := os.Getenv("MASKPAIR_SHOTS")
	if dir == "" {
		return
	}
	data, err := chromedp.Run(b.ctx, chromedp.FullScreenshot(100))
	if err == nil {
		err = os.WriteFile(filepath.Join(dir, name+".png"), data, 0o644)
	}
	if err != nil {
		t.Fatal(err)
	}
}

// kinds counts the kinds of unresolved components of a report.
func (w *written) kinds() (kinds, odd, clash int) {
	type kind struct {
		layer string
		group float64
	}
	seen := map[kind]bool{}
	for _, l := range w.report["layers"].([]any) {
		layer := l.(map[string]any)
		for _, u := range layer["unresolved"].([]any) {
			entry := u.(map[string]any)
			k := kind{layer["name"].(string), entry["group"].(float64)}
			if seen[k] {
				continue
			}
			seen[k] = true
			if entry["cause"] == "odd_cycle" {
				odd++
			} else {
				clash++
			}
		}
	}
	return len(seen), odd, clash
}

func TestPageInBrowser(t *testing.T) {
	w := write(t)
	b := start(t)
	b.do(t, chromedp.EmulateViewport(1280, 900), media("screen", "light"), chromedp.Navigate("file://"+w.page), chromedp.WaitReady(chromedp.CSS("#about")))

	t.Run("cards", func(t *testing.T) {
		kinds, odd, clash := w.kinds()
		if odd < 3 || clash < 1 {
			t.Fatalf("the scene has %d kinds of odd cycles and %d of clashes; it is to have more", odd, clash)
		}
		if n := ask[int](t, b, `document.querySelectorAll("article.card").length`); n != kinds {
			t.Errorf("%d cards for %d kinds", n, kinds)
		}
		if n := ask[int](t, b, `document.querySelectorAll("article.card svg.picture").length`); n != kinds {
			t.Errorf("%d drawings for %d kinds", n, kinds)
		}
		if n := ask[int](t, b, `[...document.querySelectorAll("table.jobs a")].filter(a => document.getElementById(a.hash.slice(1))?.matches("article.card")).length`); n != kinds {
			t.Errorf("%d links lead to a card, of %d", n, kinds)
		}
		if n := ask[int](t, b, `[...document.querySelectorAll("header nav a, .map a")].filter(a => !document.getElementById((a.hash ?? a.getAttribute("href")).replace("#", ""))).length`); n > 0 {
			t.Errorf("%d links lead nowhere", n)
		}
		// Each cycle's shapes have their numbers in the drawing.
		missing := ask[[]string](t, b, `[...document.querySelectorAll("article.card")].filter(c =>
			c.querySelectorAll(".steps li:not(.more)").length != c.querySelectorAll("svg.picture text.bead").length).map(c => c.id)`)
		if len(missing) > 0 {
			t.Errorf("drawings without all numbers: %v", missing)
		}
	})

	t.Run("words", func(t *testing.T) {
		text := ask[string](t, b, `document.body.innerText`)
		for _, want := range []string{"not a sign-off", "left <end>", "right & end", `measured on "silicon" & <accepted>`, "via & <pad>", hostile, "apply = true", "Moved against the baseline", "Too near on any masks", "Accepted by a waiver"} {
			if !strings.Contains(text, want) {
				t.Errorf("the page does not say %q", want)
			}
		}
		if title := ask[string](t, b, `document.title`); !strings.Contains(title, "layout.gds") {
			t.Errorf("title %q", title)
		}
		if h := ask[string](t, b, `document.querySelector("h1").innerText`); !strings.HasPrefix(h, "No.") {
			t.Errorf("the page begins with %q", h)
		}
	})

	t.Run("to scale", func(t *testing.T) {
		// The long wire of the ring is 600 by 20; whatever the turn, its drawn box has that ratio, and the bar the length it says.
		ratio := ask[float64](t, b, `Math.max(...[...document.querySelectorAll("svg.picture path.a, svg.picture path.b")].map(p => {
			const r = p.getBBox(); return Math.max(r.width / r.height, r.height / r.width); }))`)
		if math.Abs(ratio-30) > 0.5 {
			t.Errorf("the longest drawn shape is %.2f times as long as wide, not 30 times", ratio)
		}
		perUnit := ask[[]float64](t, b, `[...document.querySelectorAll("svg.picture")].filter(s => [...s.querySelectorAll("path.a, path.b")].some(p => {
			const r = p.getBBox(); return Math.abs(Math.max(r.width / r.height, r.height / r.width) - 30) < 0.5; })).flatMap(s => {
			const wire = Math.max(...[...s.querySelectorAll("path.a, path.b")].map(p => { const r = p.getBBox(); return Math.max(r.width, r.height); }));
			return [wire / 600, s.querySelector("path.bar").getBBox().width / parseFloat(s.querySelector("text.bar").textContent)]; })`)
		if len(perUnit) == 0 || math.Abs(perUnit[0]-perUnit[1]) > 0.01*perUnit[0] {
			t.Errorf("pixels per nm by the wire and by the bar: %v", perUnit)
		}
	})

	t.Run("contrast", func(t *testing.T) {
		for _, scheme := range []string{"light", "dark"} {
			b.do(t, media("screen", scheme), chromedp.Evaluate[chromedp.Void](`document.querySelectorAll("details").forEach(d => d.open = true)`))
			// Web Content Accessibility Guidelines 2.1, success criterion 1.4.3: 4.5 to 1.
			for _, bad := range ask[[]string](t, b, contrastScript) {
				t.Errorf("%s: %s", scheme, bad)
			}
			b.do(t, chromedp.Evaluate[chromedp.Void](`document.querySelectorAll("details").forEach(d => d.open = false)`))
			b.shot(t, "1280-"+scheme)
		}
		b.do(t, chromedp.EmulateViewport(1280, 900), media("screen", "light"))
	})

	t.Run("narrow", func(t *testing.T) {
		for _, scheme := range []string{"light", "dark"} {
			b.do(t, chromedp.EmulateViewport(400, 800), media("screen", scheme))
			if wide := ask[float64](t, b, `document.documentElement.scrollWidth`); wide > 400 {
				t.Errorf("the page is %g pixels wide on a screen of 400", wide)
			}
			b.shot(t, "400-"+scheme)
		}
		b.do(t, chromedp.EmulateViewport(1280, 900), media("screen", "light"))
	})

	t.Run("keyboard", func(t *testing.T) {
		b.do(t, chromedp.Navigate("file://"+w.page), chromedp.WaitReady(chromedp.CSS("#about")), chromedp.KeyEvent(kb.Tab))
		if first := ask[string](t, b, `document.activeElement.className`); first != "skip" {
			t.Errorf("the first Tab leads to %q, not to the way past the head", first)
		}
		b.do(t, chromedp.KeyEvent(kb.Enter))
		if hash := ask[string](t, b, `location.hash`); hash != "#mend" {
			t.Errorf("Enter there leads to %q", hash)
		}
		// From there, Tab reaches the first card's link, Enter the card, and Tab its first copy button, which says what it did.
		reach := func(what, selector string) {
			t.Helper()
			for range 30 {
				b.do(t, chromedp.KeyEvent(kb.Tab))
				if ask[bool](t, b, `document.activeElement.matches(`+fmt.Sprintf("%q", selector)+`)`) {
					return
				}
			}
			t.Fatalf("30 times Tab do not reach %s", what)
		}
		reach("the list", "table.jobs a")
		b.do(t, chromedp.KeyEvent(kb.Enter))
		if !ask[bool](t, b, `document.querySelector("article.card").matches(":target")`) {
			t.Errorf("Enter on the first link leads to %q", ask[string](t, b, `location.hash`))
		}
		reach("a copy button", "article.card button.copy")
		b.do(t, chromedp.KeyEvent(kb.Enter), chromedp.Sleep(200*time.Millisecond))
		want := ask[string](t, b, `document.activeElement.dataset.copy`)
		if said := ask[string](t, b, `document.querySelector("#said").innerText`); said != "copied: "+want {
			t.Errorf("after copying %q the page says %q", want, said)
		}
		// No copied coordinate has more than what the anchor file takes.
		odd := ask[[]string](t, b, `[...document.querySelectorAll("button.copy")].map(x => x.dataset.copy).filter(x => !/^-?[0-9.]+(, -?[0-9.]+){1,3}$/.test(x) && !x.startsWith("[[waiver]]"))`)
		if len(odd) > 0 {
			t.Errorf("these cannot be pasted: %q", odd)
		}
		if hidden := ask[int](t, b, `[...document.querySelectorAll("a, button, summary, [tabindex]")].filter(x => x.tabIndex > 0).length`); hidden > 0 {
			t.Errorf("%d elements change the order of Tab", hidden)
		}
	})

	t.Run("print", func(t *testing.T) {
		b.do(t, media("print", "light"))
		colours := ask[[]string](t, b, `[...new Set([...document.querySelectorAll(".line-a, .line-b, .ground-a, .ground-b")].flatMap(x => {
			const s = getComputedStyle(x); return x.matches(".line-a, .line-b") ? [s.stroke] : [s.fill]; }))]`)
		for _, c := range colours {
			if c != "rgb(0, 0, 0)" && c != "rgb(255, 255, 255)" {
				t.Errorf("on paper a mask is drawn in %s", c)
			}
		}
		b.shot(t, "print")
	})

	t.Run("silence", func(t *testing.T) {
		b.mu.Lock()
		defer b.mu.Unlock()
		for _, line := range b.spoke {
			t.Errorf("the console says: %s", line)
		}
		for _, url := range b.requests {
			if url != "file://"+w.page && !strings.HasPrefix(url, "file://"+w.page+"#") {
				t.Errorf("the page asks for %s", url)
			}
		}
		if len(b.requests) == 0 {
			t.Error("not even the page itself was asked for; does the test listen?")
		}
		info, err := os.Stat(w.page)
		if err != nil {
			t.Fatal(err)
		}
		if info.Size() > 5<<20 {
			t.Errorf("the page has %d bytes", info.Size())
		}
	})
}

// contrastScript gives every text that does not stand out enough from what is behind it: from the nearest ground that an element or
// its forebears paint. Texts in drawings stand on a rim in the colour of the sheet, or on a bead.
const contrastScript = `(() => {
  const parse = c => { const m = c.match(/[\d.]+/g).map(Number); return { r: m[0], g: m[1], b: m[2], a: m.length > 3 ? m[3] : 1 }; };
  const linear = v => { v /= 255; return v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4; };
  const light = c => 0.2126 * linear(c.r) + 0.7152 * linear(c.g) + 0.0722 * linear(c.b);
  const ground = e => {
    for (; e; e = e.parentElement) {
      const s = getComputedStyle(e);
      if (e.ownerSVGElement && e.tagName === "text" && s.stroke !== "none") return parse(s.stroke);
      const c = parse(s.backgroundColor);
      if (c.a === 1) return c;
    }
    return parse(getComputedStyle(document.body).backgroundColor);
  };
  const bad = new Set();
  const walk = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
  for (let n; n = walk.nextNode();) {
    const e = n.parentElement;
    if (!n.data.trim() || e.closest("script, style, title, .skip") || !e.getClientRects().length) continue;
    const s = getComputedStyle(e);
    const ink = parse(e.ownerSVGElement ? s.fill : s.color), back = ground(e);
    const a = light(ink), b = light(back);
    const ratio = (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
    if (ratio < 4.5) bad.add(e.tagName + "." + (e.getAttribute("class") || "") + " has " + ratio.toFixed(2) + " to 1: " + n.data.trim().slice(0, 40));
  }
  return [...bad];
})()`
