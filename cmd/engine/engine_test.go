//go:build !js

package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"

	"steelyard/forest/webpage"
	"steelyard/ingest"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// page reads a sheet and hands it over as the report page does.
func page(t testing.TB, path string) *opened {
	t.Helper()
	x, plan, err := ingest.Open(context.Background(), path, ingest.Options{})
	if err != nil {
		t.Fatal(err)
	}
	data, err := json.Marshal(&opened{Version: "test", Extraction: x, Plan: plan})
	if err != nil {
		t.Fatal(err)
	}
	o, err := open(data)
	if err != nil {
		t.Fatal(err)
	}
	return o
}

// random returns a change such as a reader of the page may make.
func random(r *rand.Rand, o *opened, outcome string) variant {
	v := variant{Outcome: outcome, Changes: map[string]string{}}
	pick := func(values ...string) string { return values[r.IntN(len(values))] }
	for setting, values := range map[string][]string{
		"effects": {"common", "random"}, "tau": {"restricted-ml", "paule-mandel", "dersimonian-laird", "maximum-likelihood"},
		"interval": {"wald", "hartung-knapp", "hartung-knapp-floor"}, "level": {"0.9", "0.95", "0.99"}, "prior": {"0.1", "0.03, 0.5"},
		"important": {"0.8", "0.9, 1.2"}, "where": {"year >= 1950 or year < 1940", "converted is no", `study is not "Nobody's"`},
	} {
		if r.IntN(3) == 0 {
			v.Changes[setting] = pick(values...)
		}
	}
	if v.Changes["effects"] == "common" {
		delete(v.Changes, "tau")
		delete(v.Changes, "interval")
	}
	for i := range o.Extraction.Studies {
		if s := &o.Extraction.Studies[i]; s.Outcome == outcome && r.IntN(5) == 0 {
			v.LeftOut = append(v.LeftOut, s.Row.Row)
		}
	}
	return v
}

// TestSameAsCommandLine wants random changes to give just the numbers that the command
// shown beside them prints.
func TestSameAsCommandLine(t *testing.T) {
	variants := 50
	if testing.Short() {
		variants = 5
	}
	program := filepath.Join(t.TempDir(), "steelyard")
	if out, err := exec.Command("go", "build", "-o", program, "../steelyard").CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	folder, err := filepath.Abs("../../testdata")
	if err != nil {
		t.Fatal(err)
	}
	for _, path := range []string{"checks/bcg_counts.csv", "published/magnesium.csv", "demo.xlsx"} {
		t.Run(filepath.Base(path), func(t *testing.T) {
			t.Parallel()
			path := filepath.Join(folder, path)
			o := page(t, path)
			outcomes := o.Extraction.Outcomes()
			r := rand.New(rand.NewPCG(14, uint64(len(path))))
			pooled := 0
			for i := range variants {
				v := random(r, o, outcomes[i%len(outcomes)])
				request, err := json.Marshal(v)
				if err != nil {
					t.Fatal(err)
				}
				got := o.answer(request)
				if got.Document == nil {
					t.Fatalf("%s: %s", request, got.Problem)
				}
				for part, form := range map[string]string{"pool": "", "cumulative": "cumulative", "leave-one-out": "leave_one_out"} {
					if form != "" && i%5 != 0 {
						continue
					}
					command := strings.Replace(got.Command, "steelyard pool", program+" "+part, 1) + " --format json"
					want := printed(t, filepath.Dir(path), command)
					same(t, fmt.Sprintf("%s\n%s", request, command), document(t, got.Document), want, form)
				}
				if got.Document.Outcomes[0].ResultDocument != nil {
					pooled++
				}
			}
			if pooled < variants/2 {
				t.Errorf("only %d of %d variants could be pooled", pooled, variants)
			}
		})
	}
}

// printed runs a command as a shell does and returns the outcome it prints.
func printed(t *testing.T, folder, command string) map[string]any {
	t.Helper()
	call := exec.Command("sh", "-c", command)
	call.Dir = folder
	call.Env = append(os.Environ(), "LC_ALL=C")
	out, err := call.Output()
	if failed, ok := err.(*exec.ExitError); ok && failed.ExitCode() == 1 {
		err = nil // rows are left out, as the variant asks, or nothing can be pooled
	}
	if err != nil {
		t.Fatalf("%s: %v", command, err)
	}
	return document(t, json.RawMessage(out))
}

// document returns the first outcome of a JSON document.
func document(t *testing.T, d any) map[string]any {
	t.Helper()
	data, err := json.Marshal(d)
	if err != nil {
		t.Fatal(err)
	}
	var all struct{ Outcomes []map[string]any }
	decoder := json.NewDecoder(bytes.NewReader(data))
	decoder.UseNumber() // so that every digit counts
	if err := decoder.Decode(&all); err != nil || len(all.Outcomes) != 1 {
		t.Fatalf("%d outcomes, %v", len(all.Outcomes), err)
	}
	return all.Outcomes[0]
}

// same compares what the command prints with the engine's outcome: everything of the
// pooled result, or one list of the others.
func same(t *testing.T, what string, got, want map[string]any, list string) {
	t.Helper()
	for name, value := range want {
		if name == "plan" || (list != "" && name != list) {
			continue
		}
		if name == "notes" && subset(value, got[name]) { // the page wants more parts, which have notes of their own
			continue
		}
		if !reflect.DeepEqual(got[name], value) {
			t.Errorf("%s\n%s differs:\n got %v\nwant %v", what, name, got[name], value)
		}
	}
	if list != "" && want["pooled"] != nil && want[list] == nil {
		t.Errorf("%s: the command prints no %s", what, list)
	}
}

// subset reports whether the texts of a list are all in another.
func subset(part, whole any) bool {
	all, _ := whole.([]any)
	for _, text := range part.([]any) {
		if !slices.Contains(all, text) {
			return false
		}
	}
	return true
}

// TestAdded wants a hypothetical study to count as a row of the sheet does.
func TestAdded(t *testing.T) {
	o := page(t, filepath.Join("..", "..", "testdata", "checks", "bcg_counts.csv"))
	x := *o.Extraction
	sheet := "study,year,events treated,total treated,events control,total control\n"
	for i := range x.Studies {
		s := &x.Studies[i]
		cells := []string{s.Name, s.Cell("year")}
		for _, f := range []review.Field{review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl} {
			n, _ := s.Number(f)
			cells = append(cells, n.Place.Text)
		}
		sheet += strings.Join(cells, ",") + "\n"
	}
	sheet += "New trial,2030,12,900,30,905\n"
	more, plan, err := ingest.Read(context.Background(), []byte(sheet), "more.csv", ingest.Options{})
	if err != nil {
		t.Fatal(err)
	}
	want, err := synthesis.Run(context.Background(), more, plan, synthesis.Want{})
	if err != nil {
		t.Fatal(err)
	}
	got := o.answer([]byte(`{"outcome":"` + x.Studies[0].Outcome + `","added":{"study":"New trial","year":2030,"numbers":{"events treated":12,"total treated":900,"events control":30,"total control":905}}}`))
	if got.Document == nil || got.Command != "" {
		t.Fatalf("%+v", got)
	}
	mean := want.Outcomes[0].Result.Fit.Mean
	pooled := got.Document.Outcomes[0].Pooled
	if pooled.Estimate != mean.Estimate || pooled.SE != mean.SE || got.Document.Outcomes[0].K != 14 {
		t.Errorf("estimate %v (%v), k %d; want %v (%v) of the sheet with the row", pooled.Estimate, pooled.SE, got.Document.Outcomes[0].K, mean.Estimate, mean.SE)
	}
}

// TestBadChanges wants a problem in words, never a result, for what cannot be done.
func TestBadChanges(t *testing.T) {
	o := page(t, filepath.Join("..", "..", "testdata", "checks", "bcg_counts.csv"))
	for request, want := range map[string]string{
		`{`:                                     "cannot be read",
		`{"changes":{"tau":"guess"}}`:           "restricted-ml",
		`{"changes":{"colour":"red"}}`:          "not a known setting",
		`{"changes":{"where":"nonsense"}}`:      "no condition",
		`{"changes":{"where":"shoe > 3"}}`:      "shoe",
		`{"outcome":"height"}`:                  "height",
		`{"added":{"numbers":{"study":3}}}`:     "no number of a study",
		`{"added":{"numbers":{"estimate":-1}}}`: "",
	} {
		got := o.answer([]byte(request))
		problem := got.Problem
		if got.Document != nil && len(got.Document.Outcomes) == 1 {
			problem = got.Document.Outcomes[0].Problem
			for _, e := range got.Document.Outcomes[0].Excluded {
				problem += e.Reason
			}
		}
		if problem == "" || !strings.Contains(problem, want) {
			t.Errorf("%s: problem %q, want one with %q", request, problem, want)
		}
	}
	if _, err := open([]byte(`{"extraction":{}}`)); err == nil {
		t.Error("data without a plan were opened")
	}
}

// TestServe wants a reply for each line.
func TestServe(t *testing.T) {
	o := page(t, filepath.Join("..", "..", "testdata", "demo.xlsx"))
	data, err := json.Marshal(o)
	if err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	if err := serve(strings.NewReader(string(data)+"\n{\"outcome\":\"serious harm\"}\nnonsense"), &out); err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(strings.TrimSpace(out.String()), "\n")
	if len(lines) != 2 || !strings.Contains(lines[0], `"outcome":"serious harm"`) || !strings.Contains(lines[1], "cannot be read") {
		t.Errorf("%d lines: %.200s", len(lines), out.String())
	}
	if err := serve(strings.NewReader("nonsense\n"), &out); err == nil {
		t.Error("data that are none were opened")
	}
}

// BenchmarkAnswer is one change of a review of 13 studies.
func BenchmarkAnswer(b *testing.B) {
	o := page(b, filepath.Join("..", "..", "testdata", "checks", "bcg_counts.csv"))
	for b.Loop() {
		if r := o.answer([]byte(`{"changes":{"level":"0.9"},"left_out":[3]}`)); r.Document == nil {
			b.Fatal(r.Problem)
		}
	}
}

// hundredStudies writes a sheet of 100 seeded trials and returns its path.
func hundredStudies(t testing.TB) string {
	t.Helper()
	r := rand.New(rand.NewPCG(100, 1))
	sheet := "study,year,outcome,events treated,total treated,events control,total control,risk of bias\n"
	for i := range 100 {
		n, m := 60+r.IntN(340), 60+r.IntN(340)
		sheet += fmt.Sprintf("Trialist-%d,%d,relapse,%d,%d,%d,%d,%s\n", i, 1970+i/2, 1+r.IntN(n/3), n, 1+r.IntN(m/3), m, []string{"low", "unclear", "high"}[i%3])
	}
	path := filepath.Join(t.TempDir(), "hundred.csv")
	if err := os.WriteFile(path, []byte(sheet), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

// BenchmarkHundred is one change of a review of 100 studies, as far as it is worked out at
// once and whole.
func BenchmarkHundred(b *testing.B) {
	for name, first := range map[string]bool{"first": true, "whole": false} {
		b.Run(name, func(b *testing.B) {
			o := page(b, hundredStudies(b))
			o.Outcomes = []webpage.Place{{Outcome: "relapse", ID: "o1"}}
			request := fmt.Appendf(nil, `{"outcome":"relapse","changes":{"level":"0.9"},"left_out":[3],"first":%v}`, first)
			for b.Loop() {
				text, err := json.Marshal(o.answer(request))
				if err != nil || len(text) < 1e5 {
					b.Fatalf("%d bytes, %v", len(text), err)
				}
			}
		})
	}
}

// TestFirst wants what is answered at once to hold the sections of the whole answer, with
// the same numbers, and to name the others as late.
func TestFirst(t *testing.T) {
	o := page(t, filepath.Join("..", "..", "testdata", "demo.xlsx"))
	outcome := o.Extraction.Outcomes()[0]
	o.Outcomes = []webpage.Place{{Outcome: outcome, ID: "o1"}}
	ask := func(first bool) reply {
		r := o.answer(fmt.Appendf(nil, `{"outcome":%q,"changes":{"level":"0.9"},"first":%v}`, outcome, first))
		if r.shown == nil {
			t.Fatalf("nothing to show: %s", r.Problem)
		}
		return r
	}
	whole := ask(false)
	place, err := webpage.PartOf(mustRun(t, o, outcome), 0, o.Outcomes[0], webpage.Whole)
	if err != nil || len(place.Sections) != len(whole.Sections) {
		t.Fatalf("%d sections, %v; the whole answer has %d", len(place.Sections), err, len(whole.Sections))
	}
	first := ask(true)
	html := map[string]string{}
	for _, section := range whole.Sections {
		html[section.ID] = section.HTML
	}
	for _, section := range first.Sections {
		if section.ID == "o1-answer" && html[section.ID] != section.HTML { // in the others, charts and numbers of tables are completed later
			t.Errorf("%s is another at once than whole", section.ID)
		}
		delete(html, section.ID)
	}
	for _, id := range first.Late {
		delete(html, id)
	}
	if len(html) > 0 || len(first.Late) == 0 || len(whole.Late) != 0 {
		t.Errorf("%d sections are neither there at once nor late", len(html))
	}
	if first.Lead != whole.Lead {
		t.Errorf("the lead at once is %q, whole %q", first.Lead, whole.Lead)
	}
	if !reflect.DeepEqual(first.Document.Outcomes[0].Pooled, whole.Document.Outcomes[0].Pooled) {
		t.Error("the pooled result at once is another")
	}
}

// mustRun analyses the outcome whole, as planned but for the level.
func mustRun(t *testing.T, o *opened, outcome string) *synthesis.Synthesis {
	t.Helper()
	s, _, err := o.run(variant{Outcome: outcome, Changes: map[string]string{"level": "0.9"}})
	if err != nil {
		t.Fatal(err)
	}
	return s
}
