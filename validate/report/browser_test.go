package report

import (
	"encoding/json"
	"fmt"
	"net/url"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"golang.org/x/net/websocket"
)

// browser is a Chromium that is driven over its DevTools protocol
// (https://chromedevtools.github.io/devtools-protocol/, domains Target, Page,
// Runtime, Network, Log and Emulation; from memory).
type browser struct {
	t       *testing.T
	conn    *websocket.Conn
	session string
	id      int
	events  []message
}

type message struct {
	ID        int             `json:"id,omitempty"`
	Method    string          `json:"method,omitempty"`
	Session   string          `json:"sessionId,omitempty"`
	Params    json.RawMessage `json:"params,omitempty"`
	Result    json.RawMessage `json:"result,omitempty"`
	ErrorText json.RawMessage `json:"error,omitempty"`
}

// newBrowser starts Chromium. Without one it returns nil, except where CI is set:
// there a missing browser is a failure.
func newBrowser(t *testing.T) *browser {
	t.Helper()
	if testing.Short() {
		t.Log("the page is opened in full runs only")
		return nil
	}
	program, err := exec.LookPath("chromium")
	if err != nil {
		if os.Getenv("CI") != "" {
			t.Fatal("no chromium: ", err)
		}
		t.Log("no chromium here, so the page is not opened; .ci/run installs one")
		return nil
	}
	home := t.TempDir()
	cmd := exec.Command(program, "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
		"--disable-background-networking", "--disable-component-update", "--disable-sync", "--disable-dev-shm-usage", "--hide-scrollbars",
		"--remote-allow-origins=*", "--remote-debugging-port=0", "--user-data-dir="+home, "about:blank")
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	ended := make(chan error, 1)
	go func() { ended <- cmd.Wait() }()
	b := &browser{t: t}
	t.Cleanup(func() {
		if b.conn != nil {
			b.conn.Close()
		}
		cmd.Process.Kill()
		<-ended
		// The browser's own children still write into its folder for a moment.
		for range 50 {
			if os.RemoveAll(home) == nil {
				break
			}
			time.Sleep(20 * time.Millisecond)
		}
	})
	for b.conn == nil {
		select {
		case err := <-ended:
			ended <- err
			t.Fatal("chromium ended: ", err)
		case <-time.After(20 * time.Millisecond):
		}
		text, err := os.ReadFile(filepath.Join(home, "DevToolsActivePort"))
		port, path, ok := strings.Cut(strings.TrimSpace(string(text)), "\n")
		if err != nil || !ok {
			continue
		}
		if b.conn, err = websocket.Dial("ws://127.0.0.1:"+port+path, "", "http://127.0.0.1"); err != nil {
			t.Fatal(err)
		}
	}
	var target struct {
		TargetID  string `json:"targetId"`
		SessionID string `json:"sessionId"`
	}
	b.call("Target.createTarget", map[string]any{"url": "about:blank"}, &target)
	b.call("Target.attachToTarget", map[string]any{"targetId": target.TargetID, "flatten": true}, &target)
	b.session = target.SessionID
	for _, d := range []string{"Page", "Runtime", "Network", "Log"} {
		b.call(d+".enable", nil, nil)
	}
	return b
}

// call sends a command and waits for its answer; events on the way are kept.
func (b *browser) call(method string, params, result any) {
	b.t.Helper()
	b.id++
	raw, err := json.Marshal(params)
	if err != nil {
		b.t.Fatal(err)
	}
	if params == nil {
		raw = nil
	}
	if err := websocket.JSON.Send(b.conn, message{ID: b.id, Method: method, Session: b.session, Params: raw}); err != nil {
		b.t.Fatal(method, ": ", err)
	}
	for {
		m := b.receive()
		if m.ID != b.id {
			continue
		}
		if m.ErrorText != nil {
			b.t.Fatalf("%s: %s", method, m.ErrorText)
		}
		if result != nil {
			if err := json.Unmarshal(m.Result, result); err != nil {
				b.t.Fatal(method, ": ", err)
			}
		}
		return
	}
}

func (b *browser) receive() message {
	b.t.Helper()
	var m message
	if err := websocket.JSON.Receive(b.conn, &m); err != nil {
		b.t.Fatal(err)
	}
	if m.Method != "" {
		b.events = append(b.events, m)
	}
	return m
}

// open loads a file and waits until it has loaded.
func (b *browser) open(file string) {
	b.t.Helper()
	b.events = nil
	b.call("Page.navigate", map[string]any{"url": (&url.URL{Scheme: "file", Path: file}).String()}, nil)
	for {
		for _, e := range b.events {
			if e.Method == "Page.loadEventFired" {
				return
			}
		}
		b.receive()
	}
}

// evaluate runs an expression in the page and decodes its value.
func (b *browser) evaluate(expression string, into any) {
	b.t.Helper()
	var r struct {
		Result           struct{ Value json.RawMessage }
		ExceptionDetails json.RawMessage
	}
	b.call("Runtime.evaluate", map[string]any{"expression": expression, "returnByValue": true}, &r)
	if r.ExceptionDetails != nil {
		b.t.Fatalf("%s", r.ExceptionDetails)
	}
	if err := json.Unmarshal(r.Result.Value, into); err != nil {
		b.t.Fatal(err)
	}
}

// look is a way to see the page.
type look struct {
	name   string
	width  int
	media  string
	scheme string
}

var looks = []look{
	{"phone, light", 360, "screen", "light"}, {"phone, dark", 360, "screen", "dark"},
	{"screen, light", 1024, "screen", "light"}, {"screen, dark", 1024, "screen", "dark"},
	{"paper", 680, "print", "light"}, // A4 less margins of 15 mm, at 96 px per inch
}

// wide lists elements that stick out of the page, other than in a box that scrolls.
const wide = `(() => {
	const out = [];
	const w = document.documentElement.clientWidth;
	if (document.documentElement.scrollWidth > w) out.push("the page is " + document.documentElement.scrollWidth + " wide");
	for (const e of document.body.querySelectorAll("*")) {
		if (e.closest(".scroll") && !e.matches(".scroll") || e.closest(".skip")) continue;
		const r = e.getBoundingClientRect();
		if (r.width > 0 && (r.right > w + 1 || r.left < -1)) out.push(e.tagName + "." + e.getAttribute("class") + " " + e.id + " " + Math.round(r.left) + ".." + Math.round(r.right));
	}
	return out.slice(0, 10);
})()`

// crowded lists texts of drawings that run into each other or out of the drawing.
const crowded = `(() => {
	const out = [];
	for (const svg of document.querySelectorAll("svg.plot")) {
		const box = svg.getBoundingClientRect();
		const texts = [...svg.querySelectorAll("text")].map(e => [e.textContent, e.getBoundingClientRect()]);
		for (const [i, [a, r]] of texts.entries()) {
			if (r.left < box.left - 2 || r.right > box.right + 2 || r.top < box.top - 2 || r.bottom > box.bottom + 2) out.push(svg.id + ": " + a + " is outside");
			for (const [b, s] of texts.slice(i + 1)) {
				if (Math.min(r.right, s.right) - Math.max(r.left, s.left) > 0.5 && Math.min(r.bottom, s.bottom) - Math.max(r.top, s.top) > 0.25 * r.height) out.push(svg.id + ": " + a + " meets " + b);
			}
		}
	}
	return out.slice(0, 10);
})()`

// drawings counts drawings and lists the empty parts of them.
const drawings = `(() => {
	const out = {count: 0, paths: 0, empty: []};
	for (const svg of document.querySelectorAll("svg.plot")) {
		out.count++;
		const r = svg.getBoundingClientRect();
		if (r.width < 200 || r.height < 100) out.empty.push(svg.id + " is " + r.width + " by " + r.height);
		const paths = svg.querySelectorAll("path");
		if (paths.length < 3) out.empty.push(svg.id + " has " + paths.length + " paths");
		for (const p of paths) {
			out.paths++;
			if (!(p.getTotalLength() > 0)) out.empty.push(svg.id + ": " + p.outerHTML.slice(0, 80));
			const c = getComputedStyle(p);
			if ((c.stroke === "none" || c.strokeWidth === "0px") && c.fill === "none") out.empty.push(svg.id + ": invisible " + p.outerHTML.slice(0, 80));
		}
	}
	return out;
})()`

// faint lists texts whose contrast with the nearest background is below 4.5.
const faint = `(() => {
	const light = s => { const v = s.match(/[\d.]+/g).map(Number); const f = x => (x /= 255) <= 0.04045 ? x / 12.92 : ((x + 0.055) / 1.055) ** 2.4; return [0.2126 * f(v[0]) + 0.7152 * f(v[1]) + 0.0722 * f(v[2]), v.length > 3 ? v[3] : 1]; };
	const out = [];
	for (const e of document.body.querySelectorAll("*")) {
		if (!e.getClientRects().length) continue;
		if (![...e.childNodes].some(n => n.nodeType === 3 && n.data.trim())) continue;
		if (e.closest("title, desc, .skip")) continue;
		let b = e, back = [1, 0];
		while (b && back[1] < 1) { back = light(getComputedStyle(b).backgroundColor); b = b.parentElement; }
		const c = getComputedStyle(e);
		const front = light(e instanceof SVGElement ? c.fill : c.color)[0];
		const ratio = (Math.max(front, back[0]) + 0.05) / (Math.min(front, back[0]) + 0.05);
		if (!(ratio >= 4.5)) out.push(e.tagName + " " + e.textContent.slice(0, 30) + ": " + ratio.toFixed(2));
	}
	return out.slice(0, 10);
})()`

// TestInBrowser opens the page as a reader does.
func TestInBrowser(t *testing.T) {
	b := newBrowser(t)
	if b == nil {
		return
	}
	for _, p := range []struct {
		name  string
		get   func(*testing.T) (*Report, []byte)
		looks []look
	}{{"demo", demo, looks}, {"hostile", hostile, []look{looks[0], looks[len(looks)-1]}}, {"many", many, []look{looks[1], looks[2]}}} {
		r, page := p.get(t)
		file := filepath.Join(t.TempDir(), p.name+".html")
		if err := os.WriteFile(file, page, 0o600); err != nil {
			t.Fatal(err)
		}
		b.call("Emulation.setDeviceMetricsOverride", map[string]any{"width": 1024, "height": 900, "deviceScaleFactor": 1, "mobile": false}, nil)
		b.open(file)
		panels := 0
		for _, f := range r.Figures {
			panels += len(f.Panels)
		}
		for _, l := range p.looks {
			t.Run(p.name+", "+l.name, func(t *testing.T) {
				b.t = t
				b.call("Emulation.setDeviceMetricsOverride", map[string]any{"width": l.width, "height": 900, "deviceScaleFactor": 1, "mobile": false}, nil)
				b.call("Emulation.setEmulatedMedia", map[string]any{"media": l.media, "features": []map[string]string{{"name": "prefers-color-scheme", "value": l.scheme}}}, nil)
				for _, q := range []struct{ what, expression string }{{"sticks out", wide}, {"is crowded", crowded}, {"has too little contrast", faint}} {
					var found []string
					b.evaluate(q.expression, &found)
					for _, f := range found {
						t.Errorf("%s: %s", q.what, f)
					}
				}
				var d struct {
					Count, Paths int
					Empty        []string
				}
				b.evaluate(drawings, &d)
				if d.Count != panels || len(d.Empty) > 0 {
					t.Errorf("%d drawings, want %d; empty: %v", d.Count, panels, d.Empty)
				}
			})
		}
		b.t = t
		// Tables open and stay inside the page as well.
		b.call("Emulation.setDeviceMetricsOverride", map[string]any{"width": 360, "height": 900, "deviceScaleFactor": 1, "mobile": false}, nil)
		b.call("Emulation.setEmulatedMedia", map[string]any{"media": "screen"}, nil)
		var found []string
		b.evaluate(`document.querySelectorAll("details").forEach(d => d.open = true), `+wide, &found)
		if len(found) > 0 {
			t.Errorf("%s with all tables open: %v", p.name, found)
		}
		b.complaints(t, p.name)
	}
}

// complaints reports what the browser said or asked for since the page was opened.
func (b *browser) complaints(t *testing.T, page string) {
	t.Helper()
	documents := 0
	for _, e := range b.events {
		switch e.Method {
		case "Network.requestWillBeSent":
			var p struct {
				Type    string
				Request struct{ URL string }
			}
			if err := json.Unmarshal(e.Params, &p); err != nil {
				t.Fatal(err)
			}
			if p.Type == "Document" && strings.HasPrefix(p.Request.URL, "file:") {
				documents++
			} else if !strings.HasPrefix(p.Request.URL, "data:,") {
				t.Errorf("%s: the page asks for %s (%s)", page, p.Request.URL, p.Type)
			}
		case "Runtime.consoleAPICalled", "Runtime.exceptionThrown", "Log.entryAdded":
			t.Errorf("%s: the console says: %s", page, fmt.Sprintf("%.300s", e.Params))
		}
	}
	if documents != 1 {
		t.Errorf("%s: %d documents were loaded, want 1", page, documents)
	}
}
