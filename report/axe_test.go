package report

import (
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/chromedp/cdproto/runtime"
	"github.com/chromedp/chromedp"
)

// axeVersion is the accessibility library that looks at the pages. It is no part of
// the repository: .ci/run installs it, and without it the test skips.
const axeVersion = "4.14.1"

// axe returns the library from the folder that AXE names.
func axe(t *testing.T) string {
	t.Helper()
	folder := os.Getenv("AXE")
	if folder == "" {
		if os.Getenv("CI") != "" {
			t.Fatal("CI has to install the accessibility library and name its folder in AXE")
		}
		t.Skip("no accessibility library: npm install --prefix FOLDER axe-core@" + axeVersion + ", then AXE=FOLDER go test ./report -run Accessible")
	}
	text, err := os.ReadFile(filepath.Join(folder, "node_modules", "axe-core", "axe.min.js"))
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

// TestAccessible: none of the rules of WCAG 2.1 A and AA that a program can check
// is broken: names, roles, contrast, order of headings, tables.
func TestAccessible(t *testing.T) {
	script := axe(t)
	refused := loop07().ringDown()
	refused.Result.Status, refused.Result.Quantities = "refused", nil
	for name, page := range map[string]interface{ WritePage(io.Writer) error }{
		"ring-down": measuredLoop(0.004, 0.1), "refused": refused, "several": measuredDecays(2), "two modes": records()["two-mode"],
		"sweep": sweeps()["sweep"], "sweep refused": sweeps()["sweep-refused"], "cross-check": demoCheck(t, true), "set": coils(),
		"components": inventedComponents(t, false), "components refused": refusedComponents(t), "plan": plans(t)["plan"],
		"devices": inventedDevices(t), "history": inventedHistory(t, "loop 07", 12),
	} {
		p := open(t, browser(t), page, 1280, 900, "light")
		p.do(chromedp.Evaluate[chromedp.Void](script))
		for _, look := range []struct {
			scheme string
			width  int64
		}{{"light", 1280}, {"dark", 1280}, {"light", 360}} {
			p.do(p.scheme(look.scheme), chromedp.EmulateViewport(look.width, 900), rest)
			found, err := chromedp.Run(p.ctx, chromedp.Evaluate[string](axeRun, func(e *runtime.EvaluateParams) { e.AwaitPromise = new(true) }))
			if err != nil {
				t.Fatal(err)
			}
			if found != "" {
				t.Errorf("%s, %s, %d pixels:\n%s", name, look.scheme, look.width, strings.TrimSpace(found))
			}
		}
	}
}

// axeRun returns a line for each rule that is broken.
const axeRun = `axe.run(document, { runOnly: ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "best-practice"] }).then((r) =>
  r.violations.map((v) => v.id + ": " + v.help + "\n" + v.nodes.slice(0, 3).map((n) => "    " + n.html.slice(0, 200) + " " + n.failureSummary.replace(/\s+/g, " ")).join("\n")).join("\n"))`
