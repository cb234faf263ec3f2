//go:build !js

package webpage

import (
	"bytes"
	"crypto/sha256"
	"embed"
	"encoding/base64"
	"encoding/json"
	"errors"
	"fmt"
	"io/fs"
	"slices"
	"strings"

	"steelyard/meta/synthesis"
)

//go:embed style.css script/*.js
var files embed.FS

// Page writes the page of a synthesis. The same synthesis gives the same bytes. It
// shows the parts of an outcome that are there, so ask synthesis.Run for what Wanted
// returns.
func Page(s *synthesis.Synthesis, options Options) ([]byte, error) {
	v, err := newView(s, options)
	if err != nil {
		return nil, err
	}
	if err := v.finish(); err != nil {
		return nil, err
	}
	var m markup
	m.page(v)
	return []byte(m.String()), nil
}

// finish fills what depends on the rest of the page: style, script, data and the
// policy that allows these and nothing else.
func (v *view) finish() error {
	style, err := files.ReadFile("style.css")
	if err != nil {
		return err
	}
	more := ""
	if v.Live != nil {
		more = v.Live.Script
	}
	script, err := joinedScript(more)
	if err != nil {
		return err
	}
	data, err := json.Marshal(v.data)
	if err != nil {
		return err
	}
	css := string(style) + v.positions.css()
	v.Style, v.Script = css, script
	v.Data = island(data)
	v.Policy = fmt.Sprintf("default-src 'none'; style-src '%s'; script-src '%s'; img-src data:; base-uri 'none'; form-action 'none'", hash(css), hash(script))
	if v.Live != nil {
		v.Policy = fmt.Sprintf("default-src 'none'; style-src '%s'; script-src '%s' 'wasm-unsafe-eval'; worker-src blob:; img-src data:; base-uri 'none'; form-action 'none'", hash(css), hash(script))
		return v.finishLive()
	}
	return nil
}

// finishLive checks what the engine's elements hold, and tells the engine where on the
// page each outcome stands.
func (v *view) finishLive() error {
	for _, text := range []string{v.Live.Code, v.Live.Worker} {
		if lower := strings.ToLower(text); strings.Contains(lower, "</script") || strings.Contains(lower, "<!--") {
			return errors.New("the engine's text would end the element that holds it")
		}
	}
	places, err := json.Marshal(v.places)
	if err != nil {
		return err
	}
	sheet := bytes.TrimSpace(v.Live.Sheet)
	if len(sheet) < 2 || sheet[0] != '{' {
		return errors.New("the sheet for the engine is no JSON object")
	}
	v.Sheet = island(slices.Concat([]byte(`{"outcomes":`), places, []byte(","), sheet[1:]))
	return nil
}

// island is JSON as it may stand in a script element.
func island(data []byte) string {
	return strings.NewReplacer("</", `<\/`, "<!--", `<\u0021--`).Replace(string(data))
}

// joinedScript joins the modules, in the order of their names, with what is added to
// them, into one script with a scope of its own.
func joinedScript(more string) (string, error) {
	names, err := fs.Glob(files, "script/*.js")
	if err != nil {
		return "", err
	}
	slices.Sort(names)
	var out strings.Builder
	out.WriteString("(() => {\n'use strict';\n")
	for _, name := range names {
		content, err := files.ReadFile(name)
		if err != nil {
			return "", err
		}
		out.Write(content)
	}
	out.WriteString(more)
	out.WriteString("})();\n")
	return out.String(), nil
}

// hash is the source expression of a policy for an inline text.
func hash(text string) string {
	sum := sha256.Sum256([]byte(text))
	return "sha256-" + base64.StdEncoding.EncodeToString(sum[:])
}
