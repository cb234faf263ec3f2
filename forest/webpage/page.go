package webpage

import (
	"crypto/sha256"
	"embed"
	"encoding/base64"
	"encoding/json"
	"fmt"
	"io/fs"
	"slices"
	"strings"

	"steelyard/meta/synthesis"
)

//go:embed style.css script/*.js
var files embed.FS

// Options say how the page is written.
type Options struct {
	Version string            // of the program
	Change  *synthesis.Change // what differs from an earlier state; nil: not wanted
}

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

// Wanted returns the parts of a synthesis that the page shows.
func Wanted() synthesis.Want {
	return synthesis.Want{
		Cumulative: true, LeaveOneOut: true, Beliefs: true, Runs: true,
		Further: synthesis.Further{Panel: &synthesis.PanelWanted{}, SmallStudy: &synthesis.SmallStudyWanted{}, Posterior: true},
	}
}

// finish fills what depends on the rest of the page: style, script, data and the
// policy that allows these and nothing else.
func (v *view) finish() error {
	style, err := files.ReadFile("style.css")
	if err != nil {
		return err
	}
	script, err := joinedScript()
	if err != nil {
		return err
	}
	data, err := json.Marshal(v.data)
	if err != nil {
		return err
	}
	css := string(style) + v.positions.css()
	v.Style, v.Script = css, script
	v.Data = strings.ReplaceAll(string(data), "</", `<\/`)
	v.Policy = fmt.Sprintf("default-src 'none'; style-src '%s'; script-src '%s'; img-src data:; base-uri 'none'; form-action 'none'", hash(css), hash(script))
	return nil
}

// joinedScript joins the modules, in the order of their names, into one script with a
// scope of its own.
func joinedScript() (string, error) {
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
	out.WriteString("})();\n")
	return out.String(), nil
}

// hash is the source expression of a policy for an inline text.
func hash(text string) string {
	sum := sha256.Sum256([]byte(text))
	return "sha256-" + base64.StdEncoding.EncodeToString(sum[:])
}
