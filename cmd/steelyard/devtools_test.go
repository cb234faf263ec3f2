//go:build browser

package main

import (
	"bufio"
	"encoding/base64"
	"encoding/json"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// browser is a headless Chromium that is steered over its DevTools pipe. Everything that
// it says between two calls is kept as events.
type browser struct {
	t       *testing.T
	to      *os.File
	from    *bufio.Reader
	session string
	next    int
	events  []devtoolsMessage
}

// devtoolsMessage is a message of the DevTools protocol: an answer or an event.
type devtoolsMessage struct {
	ID      int             `json:"id"`
	Method  string          `json:"method"`
	Params  json.RawMessage `json:"params"`
	Result  json.RawMessage `json:"result"`
	Error   *struct{ Message string }
	Session string `json:"sessionId"`
}

// chromiumNames are what the program may be called.
var chromiumNames = []string{"chromium", "chromium-browser", "google-chrome", "chrome"}

// patienceForChromium is how long it may take to answer.
const patienceForChromium = 60 * time.Second

// startBrowser starts Chromium without a network, and ends it with the test. A machine
// without it fails the test: these tests are asked for by name.
func startBrowser(t *testing.T) *browser {
	t.Helper()
	var path string
	for _, name := range chromiumNames {
		if found, err := exec.LookPath(name); err == nil {
			path = found
			break
		}
	}
	if path == "" {
		t.Fatalf("no browser: install one of %s", strings.Join(chromiumNames, ", "))
	}
	theirs, to, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	from, ours, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	profile, err := os.MkdirTemp("", "steelyard-browser-")
	if err != nil {
		t.Fatal(err)
	}
	command := exec.Command(path, "--headless=new", "--hide-scrollbars", "--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-extensions",
		"--disable-background-networking", "--disable-component-update", "--disable-dev-shm-usage", "--host-resolver-rules=MAP * ~NOTFOUND",
		"--user-data-dir="+profile, "--remote-debugging-pipe", "about:blank")
	command.ExtraFiles = []*os.File{theirs, ours}
	if err := command.Start(); err != nil {
		t.Fatal(err)
	}
	_ = theirs.Close()
	_ = ours.Close()
	b := &browser{t: t, to: to, from: bufio.NewReaderSize(from, 1<<20)}
	t.Cleanup(func() {
		_ = to.Close() // Chromium ends when its pipe does
		_ = from.Close()
		ended := make(chan error, 1)
		go func() { ended <- command.Wait() }()
		select {
		case <-ended:
		case <-time.After(patienceForChromium / 6):
			_ = command.Process.Kill()
			<-ended
		}
		for range 20 { // its helpers may still write for a moment
			if os.RemoveAll(profile) == nil {
				break
			}
			time.Sleep(100 * time.Millisecond)
		}
	})
	if err := from.SetReadDeadline(time.Now().Add(10 * patienceForChromium)); err != nil {
		t.Fatal(err)
	}
	var targets struct {
		TargetInfos []struct{ TargetID, Type string }
	}
	b.call("Target.getTargets", nil, &targets)
	var attached struct{ SessionID string }
	for _, target := range targets.TargetInfos {
		if target.Type == "page" {
			b.call("Target.attachToTarget", map[string]any{"targetId": target.TargetID, "flatten": true}, &attached)
			break
		}
	}
	b.session = attached.SessionID
	for _, domain := range []string{"Page", "Runtime", "Log", "Network"} {
		b.call(domain+".enable", nil, nil)
	}
	return b
}

// call sends a command and waits for its answer.
func (b *browser) call(method string, params map[string]any, result any) {
	b.t.Helper()
	b.next++
	message := map[string]any{"id": b.next, "method": method}
	if params != nil {
		message["params"] = params
	}
	if b.session != "" && !strings.HasPrefix(method, "Target.") {
		message["sessionId"] = b.session
	}
	content, err := json.Marshal(message)
	if err != nil {
		b.t.Fatal(err)
	}
	if _, err := b.to.Write(append(content, 0)); err != nil {
		b.t.Fatalf("%s: %v", method, err)
	}
	for {
		m := b.read()
		switch {
		case m.ID == 0:
			b.events = append(b.events, m)
		case m.ID == b.next && m.Error != nil:
			b.t.Fatalf("%s: %s", method, m.Error.Message)
		case m.ID == b.next:
			if result != nil {
				if err := json.Unmarshal(m.Result, result); err != nil {
					b.t.Fatalf("%s: %v", method, err)
				}
			}
			return
		}
	}
}

func (b *browser) read() devtoolsMessage {
	b.t.Helper()
	content, err := b.from.ReadBytes(0)
	if err != nil {
		b.t.Fatalf("the browser went away: %v", err)
	}
	var m devtoolsMessage
	if err := json.Unmarshal(content[:len(content)-1], &m); err != nil {
		b.t.Fatal(err)
	}
	return m
}

// wait reads until an event of a name has come since a number of events.
func (b *browser) wait(method string, since int) {
	b.t.Helper()
	for {
		for _, m := range b.events[since:] {
			if m.Method == method {
				return
			}
		}
		since = len(b.events)
		if m := b.read(); m.ID == 0 {
			b.events = append(b.events, m)
		}
	}
}

// open shows a file in a window of some width and waits until it is loaded.
func (b *browser) open(path string, width int) {
	b.t.Helper()
	absolute, err := filepath.Abs(path)
	if err != nil {
		b.t.Fatal(err)
	}
	b.call("Emulation.setDeviceMetricsOverride", map[string]any{"width": width, "height": 900, "deviceScaleFactor": 1, "mobile": false}, nil)
	since := len(b.events)
	b.call("Page.navigate", map[string]any{"url": "file://" + filepath.ToSlash(absolute)}, nil)
	b.wait("Page.loadEventFired", since)
}

// eval runs an expression on the page and reads its value.
func (b *browser) eval(expression string, value any) {
	b.t.Helper()
	var answer struct {
		Result           struct{ Value json.RawMessage }
		ExceptionDetails *struct {
			Text      string
			Exception struct{ Description string }
		}
	}
	b.call("Runtime.evaluate", map[string]any{"expression": expression, "returnByValue": true, "awaitPromise": true}, &answer)
	if e := answer.ExceptionDetails; e != nil {
		b.t.Fatalf("%s %s\nin %.300s", e.Text, e.Exception.Description, expression)
	}
	if value != nil {
		if err := json.Unmarshal(answer.Result.Value, value); err != nil {
			b.t.Fatalf("%v in %.300s", err, expression)
		}
	}
}

// text is the text of the first element that a selector finds.
func (b *browser) text(selector string) string {
	b.t.Helper()
	var text string
	b.eval(fmt.Sprintf("document.querySelector(%q).textContent.trim()", selector), &text)
	return text
}

// complaints are errors of the console, of scripts and of the policy, and requests for
// anything but the file itself and what it holds.
func (b *browser) complaints() []string {
	var all []string
	for _, m := range b.events {
		text := string(m.Params)
		switch m.Method {
		case "Runtime.exceptionThrown", "Log.entryAdded":
			all = append(all, m.Method+": "+text)
		case "Runtime.consoleAPICalled":
			all = append(all, "console: "+text)
		case "Network.requestWillBeSent":
			var p struct{ Request struct{ URL string } }
			if err := json.Unmarshal(m.Params, &p); err != nil || !strings.HasPrefix(p.Request.URL, "file://") && !strings.HasPrefix(p.Request.URL, "data:") && !strings.HasPrefix(p.Request.URL, "blob:") {
				all = append(all, "request: "+p.Request.URL)
			}
		}
	}
	return all
}

// picture saves what the page looks like, whole, where the environment names a folder
// for it.
func (b *browser) picture(name string) {
	b.t.Helper()
	folder := os.Getenv("STEELYARD_PICTURES")
	if folder == "" {
		return
	}
	var shot struct{ Data string }
	b.call("Page.captureScreenshot", map[string]any{"captureBeyondViewport": true, "format": "png"}, &shot)
	b.save(filepath.Join(folder, name), shot.Data)
}

func (b *browser) save(path, encoded string) {
	b.t.Helper()
	content, err := base64.StdEncoding.DecodeString(encoded)
	if err != nil {
		b.t.Fatal(err)
	}
	if err := os.WriteFile(path, content, 0o644); err != nil {
		b.t.Fatal(err)
	}
}
