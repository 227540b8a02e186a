package report

import (
	"bytes"
	"context"
	"flag"
	"fmt"
	"io"
	"os"
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
)

const chromium = "/usr/bin/chromium"

// One browser serves all tests; TestMain ends it.
var (
	startBrowser = sync.OnceValues(launch)
	endBrowser   = func() {}
)

func TestMain(m *testing.M) {
	flag.Parse()
	code := m.Run()
	endBrowser()
	os.Exit(code)
}

// browser returns the context of a browser whose network is cut.
func browser(t *testing.T) context.Context {
	t.Helper()
	if _, err := os.Stat(chromium); err != nil {
		if os.Getenv("CI") != "" {
			t.Fatalf("CI has to install a browser: %v", err)
		}
		t.Skip("no browser at " + chromium)
	}
	ctx, err := startBrowser()
	if err != nil {
		t.Fatal(err)
	}
	return ctx
}

func launch() (context.Context, error) {
	options := append(chromedp.DefaultExecAllocatorOptions[:], chromedp.ExecPath(chromium), chromedp.NoSandbox, chromedp.DisableGPU,
		chromedp.Flag("disable-quic", true), chromedp.Flag("disable-background-networking", true),
		chromedp.Flag("disable-component-update", true), chromedp.Flag("disable-sync", true),
		chromedp.Flag("proxy-server", "127.0.0.1:9")) // nothing listens there
	allocator, cancelAllocator := chromedp.NewExecAllocator(context.Background(), options...)
	ctx, cancel := chromedp.NewContext(allocator)
	endBrowser = func() { cancel(); cancelAllocator() }
	return ctx, chromedp.Do(ctx)
}

// A tab shows one page and keeps what went wrong in it.
type tab struct {
	*testing.T
	ctx context.Context
	url string

	mu       sync.Mutex
	troubles []string
}

// open shows the page of r in a new tab of the given size and colour scheme.
func open(t *testing.T, parent context.Context, r interface{ WritePage(w io.Writer) error }, width, height int64, scheme string) *tab {
	t.Helper()
	file := filepath.Join(t.TempDir(), "page.html")
	var b bytes.Buffer
	if err := r.WritePage(&b); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(file, b.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := chromedp.NewContext(parent)
	t.Cleanup(cancel)
	ctx, cancel = context.WithTimeout(ctx, 2*time.Minute)
	t.Cleanup(cancel)
	p := &tab{T: t, ctx: ctx, url: "file://" + file}
	if err := chromedp.Do(ctx, chromedp.EmulateViewport(width, height)); err != nil {
		t.Fatal(err)
	}
	if err := chromedp.Listen(ctx, p.listen); err != nil {
		t.Fatal(err)
	}
	p.do(offline, p.scheme(scheme), chromedp.Navigate(p.url), rest)
	return p
}

// rest waits until the charts are laid out and drawn.
var rest = chromedp.Func(func(ctx context.Context, t *chromedp.Target) error {
	_, err := chromedp.Evaluate[chromedp.Void](`new Promise((done) => setTimeout(done, 300))`, func(p *runtime.EvaluateParams) {
		p.AwaitPromise = new(true)
	})(ctx, t)
	return err
})

var offline = chromedp.Func(func(ctx context.Context, t *chromedp.Target) error {
	if _, err := cdp.Call(ctx, t, log.Enable, cdp.Empty{}); err != nil {
		return err
	}
	if _, err := cdp.Call(ctx, t, network.Enable, network.EnableParams{}); err != nil {
		return err
	}
	_, err := cdp.Call(ctx, t, network.OverrideNetworkState, network.OverrideNetworkStateParams{Offline: true, DownloadThroughput: -1, UploadThroughput: -1})
	return err
})

func (p *tab) scheme(name string) chromedp.Action[chromedp.Void] {
	return chromedp.Func(func(ctx context.Context, t *chromedp.Target) error {
		_, err := cdp.Call(ctx, t, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{
			Features: []*emulation.MediaFeature{{Name: "prefers-color-scheme", Value: name}}})
		return err
	})
}

// listen notes exceptions, console errors and every request but that of the page.
func (p *tab) listen(event any) {
	trouble := ""
	switch e := event.(type) {
	case *runtime.EventExceptionThrown:
		trouble = fmt.Sprintf("exception: %s %+v", e.ExceptionDetails.Text, e.ExceptionDetails.Exception)
	case *runtime.EventConsoleAPICalled:
		if e.Type == "error" || e.Type == "warning" {
			trouble = fmt.Sprintf("console %s: %s", e.Type, e.Args[0].Value)
		}
	case *log.EventEntryAdded:
		trouble = fmt.Sprintf("log %s: %s", e.Entry.Level, e.Entry.Text)
	case *network.EventRequestWillBeSent:
		if u := e.Request.URL; u != p.url && !strings.HasPrefix(u, "data:") && !strings.HasPrefix(u, "blob:") {
			trouble = "request for " + u
		}
	}
	if trouble != "" {
		p.mu.Lock()
		p.troubles = append(p.troubles, trouble)
		p.mu.Unlock()
	}
}

func (p *tab) do(steps ...chromedp.Action[chromedp.Void]) {
	p.Helper()
	if err := chromedp.Do(p.ctx, steps...); err != nil {
		p.Fatal(err)
	}
}

func eval[T any](p *tab, expression string) T {
	p.Helper()
	v, err := chromedp.Run(p.ctx, chromedp.Evaluate[T](expression))
	if err != nil {
		p.Fatalf("%s: %v", expression, err)
	}
	return v
}

// quiet fails the test when something went wrong in the page.
func (p *tab) quiet() {
	p.Helper()
	p.mu.Lock()
	defer p.mu.Unlock()
	for _, s := range p.troubles {
		p.Error(s)
	}
}
