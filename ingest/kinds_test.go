package ingest

import (
	"context"
	"encoding/binary"
	"slices"
	"strings"
	"testing"
	"unicode/utf16"

	"steelyard/meta/review"
)

// TestRecogniseKinds goes through the headers of the rarer kinds of numbers.
func TestRecogniseKinds(t *testing.T) {
	for header, want := range map[string]review.Field{
		"t":                             review.TestStatistic,
		"z value":                       review.TestStatistic,
		"Sides":                         review.PSides,
		"Direction of effect":           review.Direction,
		"Baseline mean, treated":        review.BaselineMeanTreated,
		"SD at baseline (control)":      review.BaselineSDControl,
		"Median (intervention)":         review.MedianTreated,
		"Lower quartile placebo":        review.Q1Control,
		"75th percentile treated":       review.Q3Treated,
		"Min. control":                  review.MinControl,
		"Maximum, treated":              review.MaxTreated,
		"Correlation":                   review.WithinCorrelation,
		"SD of the difference":          review.SDDifference,
		"SD of differences":             review.SDDifference,
		"r":                             review.Coefficient,
		"Pearson correlation":           review.Coefficient,
		"Events":                        review.Events,
		"Number of events":              review.Events,
		"Sample size":                   review.Total,
		"n":                             review.Total,
		"Person-years":                  review.PersonTime,
		"Person-years, control group":   review.PersonTimeControl,
		"Person time (treated)":         review.PersonTimeTreated,
		"O−E":                           review.ObservedMinusExpected,
		"O minus E":                     review.ObservedMinusExpected,
		"V":                             review.Variance,
		"Share treated":                 review.ShareTreated,
		"Mean cluster size":             review.ClusterSize,
		"Intracluster correlation":      review.ICC,
		"Design effect":                 review.DesignEffect,
		"Randomized control":            review.RandomisedControl,
		"Number randomised (treatment)": review.RandomisedTreated,
		"Reported estimate":             review.ReportedEstimate,
		"Reported 95% CI low":           review.ReportedLow,
		"Published p-value":             review.ReportedP,
		"Scale minimum":                 review.ScaleLow,
		"Number of items":               review.Items,
	} {
		if got, ok := recognise(header); !ok || got.field != want {
			t.Errorf("%q is read as %v (%v), want %v", header, got.field, ok, want)
		}
	}
}

// TestReadKinds reads a small sheet of each kind of numbers: the header is understood,
// and every number reaches its field.
func TestReadKinds(t *testing.T) {
	for _, tt := range []struct {
		name string
		text string
		want string
	}{
		{"estimate and t", "study,estimate,t\nA,3.8,2.78\n", "estimate=3.8|t=2.78"},
		{"rates", "study,events treated,person years treated,events control,person years control\nA,5,120.5,9,118\n",
			"events treated=5|events control=9|person time treated=120.5|person time control=118"},
		{"medians", "study,median treated,q1 treated,q3 treated,n treated,median control,q1 control,q3 control,min control,max control,n control\n" +
			"A,5,3,8,40,6,,,1,12,41\n",
			"total treated=40|total control=41|median treated=5|q1 treated=3|q3 treated=8|median control=6|min control=1|max control=12"},
		{"correlation", "study,r,n\nA,0.3,50\n", "r=0.3|total=50"},
		{"one arm", "study,n,N\nA,3,50\n", "events=3|total=50"},
		{"rate", "study,cases,person-years\nA,3,51.5\n", "events=3|person time=51.5"},
		{"observed minus expected", "study,O-E,V\nA,-16.466,128.81\n", "observed minus expected=-16.466|variance=128.81"},
		{"p alone", "study,p,direction,n\nA,0.04,lower,80\n", "p=0.04|total=80|direction: lower"},
		{"cross-over", "study,mean treated,sd treated,mean control,sd control,n,correlation,design\nA,7,2.38,6.5,2.21,10,0.68,crossover\n",
			"mean treated=7|sd treated=2.38|mean control=6.5|sd control=2.21|correlation=0.68|total=10|design: crossover"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			x := mustRead(t, []byte(tt.text), "kinds.csv", Options{})
			if got := line(&x.Studies[0]); !strings.HasSuffix(got, tt.want) {
				t.Errorf("read as %s, want …%s", got, tt.want)
			}
			for _, f := range x.Findings {
				if f.Severity != review.Note {
					t.Errorf("finding: %+v", f)
				}
			}
		})
	}
}

// TestKindFaults: numbers of the rarer kinds that cannot be are errors at their
// cell; one that is only compared later keeps no row out.
func TestKindFaults(t *testing.T) {
	head := "study,events,total,person time,correlation,icc,p sides,reported p,estimate,se\n"
	for row, want := range map[string]string{
		"A,60,50,,,,,,1,1":     "error C1 B2",
		"A,3.5,50,,,,,,1,1":    "error C2 B2",
		"A,3,50,0,,,,,1,1":     "error C1 D2",
		"A,3,50,,1.2,,,,1,1":   "error I4 E2",
		"A,3,50,,,5,,,1,1":     "error D7 F2",
		"A,3,50,,,,3,,1,1":     "error I9 G2",
		"A,3,50,,,,,<0.05,1,1": "warning F6 H2",
	} {
		x := mustRead(t, []byte(head+row+"\n"), "kinds.csv", Options{})
		if got := said(x); !slices.Equal(got, []string{want}) {
			t.Errorf("%s: findings %q, want %s", row, got, want)
		}
	}
}

// TestThreeGroups: of several groups named by the reviewer none is taken for the
// only arm.
func TestThreeGroups(t *testing.T) {
	rows := table{{"Study", "Low", nil, "High", nil, "Nothing", nil}, {nil, "Events", "Total", "Events", "Total", "Events", "Total"},
		{"A", 1, 20, 2, 21, 3, 22}}
	x, _, err := Read(context.Background(), rows.xlsx(t, "B1:C1", "D1:E1", "F1:G1"), "t.xlsx", Options{})
	if err == nil {
		t.Errorf("read as %q with %q", lines(x), said(x))
	}
}

// TestReadings: a column of commas that may mean either is offered with both
// readings of every such cell.
func TestReadings(t *testing.T) {
	x := mustRead(t, []byte("study;mean difference;se\nA;1,234;1\nB;5;1\nC;-2,500;1\n"), "t.csv", Options{})
	var f review.Finding
	for _, have := range x.Findings {
		if have.Readings != nil {
			f = have
		}
	}
	if f.Rule != "F3" || f.Severity != review.Warning || f.Place.Cell() != "B:B" || len(f.Readings) != 2 {
		t.Fatalf("finding %+v", f)
	}
	for i, want := range [][]float64{{1.234, -2.5}, {1234, -2500}} {
		r := f.Readings[i]
		if len(r.Numbers) != 2 || r.Numbers[0].Value != want[0] || r.Numbers[1].Value != want[1] ||
			r.Numbers[0].Place.Cell() != "B2" || r.Numbers[1].Place.Cell() != "B4" || r.Numbers[0].Field != review.Estimate {
			t.Errorf("%s: %+v, want %v", r.Label, r.Numbers, want)
		}
	}
}

// TestSameTable: one table as text in three encodings and with two decimal marks,
// and as a workbook, gives the same studies.
func TestSameTable(t *testing.T) {
	rows := table{{"study", "estimate", "se", "events treated", "total treated", "note"},
		{"Müller 1999", 0.75, 0.125, 3, 40, "é"}, {"O'Brien", -1.5, 0.25, 12, 1000, "naïve"}}
	want := lines(mustRead(t, rows.xlsx(t), "t.xlsx", Options{}))
	point := string(rows.csv(t))
	comma := strings.NewReplacer(",", ";", ".", ",").Replace(point)
	for name, text := range map[string]string{"point": point, "comma": comma} {
		for encoding, data := range map[string][]byte{
			"UTF-8":                    []byte(text),
			"UTF-8 with a mark":        []byte("\ufeff" + text),
			"UTF-16, little end first": utf16Bytes(text, binary.LittleEndian),
			"UTF-16, big end first":    utf16Bytes(text, binary.BigEndian),
			"Windows-1252":             latinBytes(text),
		} {
			if got := lines(mustRead(t, data, "t.csv", Options{})); !slices.Equal(got, want) {
				t.Errorf("%s, %s:\n got %q\nwant %q", name, encoding, got, want)
			}
		}
	}
	if len(want) != 2 || !strings.Contains(want[0], "Müller 1999") || !strings.Contains(want[1], "estimate=-1.5|se=0.25|events treated=12|total treated=1000") {
		t.Errorf("the workbook is read as %q", want)
	}
}

// utf16Bytes encodes text with a byte-order mark.
func utf16Bytes(text string, order binary.ByteOrder) []byte {
	var data []byte
	for _, unit := range utf16.Encode([]rune("\ufeff" + text)) {
		data = append(data, 0, 0)
		order.PutUint16(data[len(data)-2:], unit)
	}
	return data
}

// latinBytes encodes text of the first 256 characters, one byte each.
func latinBytes(text string) []byte {
	var data []byte
	for _, r := range text {
		data = append(data, byte(r))
	}
	return data
}
