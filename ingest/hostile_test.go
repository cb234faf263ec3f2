package ingest

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// TestTextStaysText keeps what looks like a formula or markup as plain text, and
// drops control characters.
func TestTextStaysText(t *testing.T) {
	rows := table{{"study", "y", "se", "note"}, {"=1+1", 1, 1, "<script>alert(1)</script>"}, {"A\tB\n C", 2, 1, "@SUM(A1)"}, {"  Zielińska\u00a02011 ", 3, 1}}
	for name, data := range map[string][]byte{"a.csv": rows.csv(t), "a.xlsx": rows.xlsx(t)} {
		x := mustRead(t, data, name, Options{})
		var names []string
		for _, s := range x.Studies {
			names = append(names, s.Name)
		}
		if got, want := strings.Join(names, "|"), "=1+1|A B C|Zielińska 2011"; got != want {
			t.Errorf("%s: names %q, want %q", name, got, want)
		}
		if r, _ := x.Studies[0].Remark("note"); r.Text != "<script>alert(1)</script>" {
			t.Errorf("%s: note %q", name, r.Text)
		}
	}
	x := mustRead(t, []byte("study,y,se\nA\x1b\x7fB,1,1\n"), "a.csv", Options{})
	if got := x.Studies[0].Name; got != "AB" {
		t.Errorf("name %q, want AB", got)
	}
}

// TestHostileSheets wants an error or an answer of what no reviewer writes; "make
// soak" measures what it costs.
func TestHostileSheets(t *testing.T) {
	wide := strings.Repeat("x,", 9_999) + "x\n"
	for name, data := range map[string]string{
		"10,000 columns":        "study,y,se," + wide + "A,1,1," + wide,
		"1,000 columns":         "study,y,se," + strings.Repeat("odds ratio,", 900) + "z\nA,1,1," + strings.Repeat("1,", 900) + "1\n",
		"thirty rows of titles": strings.Repeat(strings.Repeat("title words here,", 900)+"\n", 40),
		"blank lines":           strings.Repeat("\n", 10_000),
		"long cell":             "study,y,se\n" + strings.Repeat("A", 200_000) + ",1,1\n",
		"zeros":                 "study,y,se\n\x00\x00\x00,\x00,\x00\n",
		"quotes":                "study,y,se\n\"\"\"\",\"1\",\"\"\n",
	} {
		x, plan, err := Read(context.Background(), []byte(data), "a.csv", Options{})
		if (err == nil) != (x != nil) || (err == nil) != (plan != nil) {
			t.Errorf("%s: extraction %v with error %v", name, x != nil, err)
		}
	}
}

// TestEveryBadCellIsReported does not stop at the first or the hundredth.
func TestEveryBadCellIsReported(t *testing.T) {
	var buffer bytes.Buffer
	buffer.WriteString("study,y,se\n")
	for i := range 5000 {
		fmt.Fprintf(&buffer, "S%d,bad,worse\n", i)
	}
	x := mustRead(t, buffer.Bytes(), "a.csv", Options{})
	if len(x.Findings) != 10_000 || len(x.Studies) != 5000 {
		t.Errorf("%d findings of %d studies, want 10000 of 5000", len(x.Findings), len(x.Studies))
	}
}

// TestInterrupted gives up when the context ends.
func TestInterrupted(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if x, _, err := Read(ctx, manyStudies(10_000), "a.csv", Options{}); !errors.Is(err, context.Canceled) || x != nil {
		t.Errorf("the cells are read to the end: %v", err)
	}
	cells, err := grid.Read(context.Background(), manyStudies(10_000), "a.csv")
	if err != nil {
		t.Fatal(err)
	}
	if x, _, err := read(ctx, cells, beside{}, Options{}); !errors.Is(err, context.Canceled) || x != nil {
		t.Errorf("the studies are read to the end: %v", err)
	}
}

// FuzzSheet holds small text files to what every answer promises.
func FuzzSheet(f *testing.F) {
	for _, seed := range []string{
		"study,y,se\nA,1,0.5\nB,-2,1\n",
		"study,year,events treated,total treated,events control,total control,accept\nA,2001a,3,40,5,41,C1 fine\nTotal,,3,40,5,41,\n",
		"Study,Brindle,,Without,\n,Events,Total,Events,Total\nA,1,20,2,21\n",
		"title\n\nstudy;OR;95% CI low;95% CI high\nA;0,5;0,25;1,234\n",
		"study\ty\tse\nA\t<0.1\t1e999\n\n* note\n",
		"study,measure,estimate,se,better\nA,log OR,-1,1,lower\nA,log OR,-1,1,lower\n",
	} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		if len(data) > 1<<14 {
			return
		}
		x, plan, err := Read(context.Background(), data, "a.csv", Options{})
		if (err == nil) != (x != nil) || (err == nil) != (plan != nil) {
			t.Fatalf("extraction %v and plan %v with error %v", x != nil, plan != nil, err)
		}
		if err != nil {
			return
		}
		for i := range x.Studies {
			checkStudy(t, &x.Studies[i])
		}
		for _, finding := range x.Findings {
			if finding.Message == "" || finding.Rule == "" {
				t.Fatalf("finding %+v", finding)
			}
		}
	})
}

func checkStudy(t *testing.T, s *review.Study) {
	if s.Row.Row < 1 || s.Row.File != "a.csv" || s.Name == "" {
		t.Fatalf("study %q in %+v", s.Name, s.Row)
	}
	seen := map[review.Field]bool{}
	for _, n := range s.Numbers {
		if math.IsNaN(n.Value) || math.IsInf(n.Value, 0) || !n.Field.Numeric() || n.Place.Col < 1 || n.Place.Row < 1 || seen[n.Field] {
			t.Fatalf("%s: number %+v", s.Name, n)
		}
		seen[n.Field] = true
	}
}
