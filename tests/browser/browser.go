//go:build e2e

package browser

import (
	"bufio"
	"context"
	"encoding/base64"
	"encoding/json"
	"fmt"
	"io"
	"os"
	"os/exec"
	"strings"
	"sync"
	"testing"
	"time"
)

// Page is one open page, with what happened on it. The browser is driven over its
// debugging pipe: messages are JSON, each ended by a zero byte, written to its
// descriptor 3 and read from 4.
type Page struct {
	t       testing.TB
	in      io.Writer
	session string

	mu       sync.Mutex
	next     int
	waiting  map[int]chan message
	requests []string
	faults   []string
}

type message struct {
	ID      int             `json:"id"`
	Method  string          `json:"method"`
	Params  json.RawMessage `json:"params"`
	Result  json.RawMessage `json:"result"`
	Session string          `json:"sessionId"`
	Error   *struct {
		Message string `json:"message"`
	} `json:"error"`
}

// patience bounds one call and one wait; browsers start slowly on a busy machine.
const patience = 60 * time.Second

// Open starts a browser of its own with an empty page; it ends with the test.
func Open(t testing.TB) *Page {
	t.Helper()
	toRead, toWrite, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	fromRead, fromWrite, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	profile, err := os.MkdirTemp("", "browser")
	if err != nil {
		t.Fatal(err)
	}
	c := exec.CommandContext(context.Background(), "chromium", "--headless=new", "--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage", "--remote-debugging-pipe", "--no-first-run",
		"--disable-background-networking", "--disable-component-update", "--disable-sync", "--window-size=1280,900", "--user-data-dir="+profile, "about:blank")
	c.ExtraFiles = []*os.File{toRead, fromWrite}
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	p := &Page{t: t, in: toWrite, waiting: map[int]chan message{}}
	go p.listen(fromRead)
	t.Cleanup(func() {
		_ = c.Process.Kill()
		_ = c.Wait()
		for _, f := range []*os.File{toRead, toWrite, fromRead, fromWrite} {
			_ = f.Close()
		}
		_ = os.RemoveAll(profile) // its children may still be writing; what they leave is a temporary folder
	})
	var created struct{ TargetID, SessionID string }
	p.into(p.call("Target.createTarget", map[string]any{"url": "about:blank"}), &created)
	p.into(p.call("Target.attachToTarget", map[string]any{"targetId": created.TargetID, "flatten": true}), &created)
	p.session = created.SessionID
	for _, domain := range []string{"Page", "Runtime", "Network", "Log"} {
		p.call(domain+".enable", nil)
	}
	return p
}

func (p *Page) listen(from io.Reader) {
	r := bufio.NewReader(from)
	for {
		raw, err := r.ReadBytes(0)
		if err != nil {
			return
		}
		var m message
		if json.Unmarshal(raw[:len(raw)-1], &m) != nil {
			continue
		}
		p.mu.Lock()
		if reply := p.waiting[m.ID]; m.ID != 0 && reply != nil {
			delete(p.waiting, m.ID)
			reply <- m
		} else {
			p.note(m)
		}
		p.mu.Unlock()
	}
}

// note keeps the requests of the page and everything that it complains about.
func (p *Page) note(m message) {
	var e struct {
		Request struct{ URL string }
		Entry   struct{ Level, Text, URL string }
		Details struct {
			Text      string
			Exception struct{ Description string }
		} `json:"exceptionDetails"`
	}
	_ = json.Unmarshal(m.Params, &e)
	switch m.Method {
	case "Network.requestWillBeSent":
		p.requests = append(p.requests, e.Request.URL)
	case "Log.entryAdded":
		if e.Entry.Level == "error" || e.Entry.Level == "warning" {
			p.faults = append(p.faults, e.Entry.Text+" "+e.Entry.URL)
		}
	case "Runtime.exceptionThrown":
		p.faults = append(p.faults, e.Details.Text+" "+e.Details.Exception.Description)
	}
}

func (p *Page) call(method string, params map[string]any) json.RawMessage {
	p.t.Helper()
	reply := make(chan message, 1)
	p.mu.Lock()
	p.next++
	id := p.next
	p.waiting[id] = reply
	p.mu.Unlock()
	body := map[string]any{"id": id, "method": method, "params": params}
	if params == nil {
		body["params"] = map[string]any{}
	}
	if p.session != "" {
		body["sessionId"] = p.session
	}
	raw, err := json.Marshal(body)
	if err != nil {
		p.t.Fatal(err)
	}
	if _, err := p.in.Write(append(raw, 0)); err != nil {
		p.t.Fatal(err)
	}
	select {
	case m := <-reply:
		if m.Error != nil {
			p.t.Fatalf("%s: %s", method, m.Error.Message)
		}
		return m.Result
	case <-time.After(patience):
		p.t.Fatalf("%s: no reply in %v", method, patience)
		return nil
	}
}

func (p *Page) into(raw json.RawMessage, to any) {
	p.t.Helper()
	if err := json.Unmarshal(raw, to); err != nil {
		p.t.Fatal(err)
	}
}

// Go opens an address and waits until its document is complete.
func (p *Page) Go(address string) {
	p.t.Helper()
	var to struct{ ErrorText string }
	p.into(p.call("Page.navigate", map[string]any{"url": address}), &to)
	if to.ErrorText != "" {
		p.t.Fatalf("%s: %s", address, to.ErrorText)
	}
	p.Until(`document.readyState === "complete" && location.href.startsWith(` + quoted(address) + `)`)
}

// Eval evaluates an expression on the page and reads its JSON value into to, which
// may be nil.
func (p *Page) Eval(expression string, to any) {
	p.t.Helper()
	var r struct {
		Result    struct{ Value json.RawMessage }
		Exception *struct {
			Text      string
			Exception struct{ Description string }
		} `json:"exceptionDetails"`
	}
	p.into(p.call("Runtime.evaluate", map[string]any{"expression": expression, "returnByValue": true, "awaitPromise": true}), &r)
	if r.Exception != nil {
		p.t.Fatalf("%s: %s %s", expression, r.Exception.Text, r.Exception.Exception.Description)
	}
	if to != nil && r.Result.Value != nil {
		p.into(r.Result.Value, to)
	}
}

// Until waits for an expression to hold.
func (p *Page) Until(expression string) {
	p.t.Helper()
	for end := time.Now().Add(patience); ; time.Sleep(50 * time.Millisecond) {
		var holds bool
		p.Eval("Boolean("+expression+")", &holds)
		if holds {
			return
		}
		if time.Now().After(end) {
			var text string
			p.Eval("document.body.innerText.slice(0, 2000)", &text)
			p.t.Fatalf("%s does not become true; the page says:\n%s\ncomplaints: %s", expression, text, strings.Join(p.Faults(), "\n"))
		}
	}
}

// Type types text into what has the focus.
func (p *Page) Type(text string) { p.call("Input.insertText", map[string]any{"text": text}) }

var keys = map[string]int{"Tab": 9, "Enter": 13, "Space": 32, "ArrowDown": 40}

// Press presses a key, with Control if asked: Tab, Enter, Space or ArrowDown.
func (p *Page) Press(key string, modifiers ...string) {
	p.t.Helper()
	held := 0
	for _, m := range modifiers {
		held |= map[string]int{"Control": 2, "Shift": 8}[m]
	}
	name, text := key, map[string]string{"Enter": "\r", "Space": " "}[key]
	if key == "Space" {
		name = " "
	}
	for _, kind := range []string{"keyDown", "keyUp"} {
		event := map[string]any{"type": kind, "key": name, "code": key, "windowsVirtualKeyCode": keys[key], "modifiers": held}
		if kind == "keyDown" && text != "" && held == 0 {
			event["text"] = text
		}
		p.call("Input.dispatchKeyEvent", event)
	}
}

// Picture writes what the window shows to a PNG file.
func (p *Page) Picture(file string) {
	p.t.Helper()
	var shot struct{ Data string }
	p.into(p.call("Page.captureScreenshot", map[string]any{"format": "png"}), &shot)
	raw, err := base64.StdEncoding.DecodeString(shot.Data)
	if err == nil {
		err = os.WriteFile(file, raw, 0o600)
	}
	if err != nil {
		p.t.Fatal(err)
	}
}

// Requests returns the address of every request since the browser was started.
func (p *Page) Requests() []string {
	p.mu.Lock()
	defer p.mu.Unlock()
	return append([]string(nil), p.requests...)
}

// Faults returns what the browser complained about: policy violations, missing
// files, exceptions.
func (p *Page) Faults() []string {
	p.mu.Lock()
	defer p.mu.Unlock()
	return append([]string(nil), p.faults...)
}

func quoted(s string) string { return fmt.Sprintf("%q", s) }
