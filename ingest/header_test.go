package ingest

import (
	"context"
	"errors"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// TestRecognise goes through headers as people type them.
func TestRecognise(t *testing.T) {
	for header, want := range map[string]meaning{
		"Study":                              {field: review.StudyName},
		"Author (Year)":                      {field: review.StudyName},
		"First Author":                       {field: review.StudyName},
		"Study ID":                           {field: review.StudyID},
		"Year":                               {field: review.DateField},
		"Publication-year":                   {field: review.DateField},
		"Time point":                         {field: review.TimePoint},
		"Risk of bias (overall)":             {field: review.RiskOfBias},
		"No. of events (treatment group)":    {field: review.EventsTreated},
		"Events in the control group":        {field: review.EventsControl},
		"n events treated":                   {field: review.EventsTreated},
		"deaths, placebo":                    {field: review.EventsControl},
		"Intervention N":                     {field: review.TotalTreated},
		"Sample size control":                {field: review.TotalControl},
		"Total_control":                      {field: review.TotalControl},
		"Mean (intervention)":                {field: review.MeanTreated},
		"SD control":                         {field: review.SDControl},
		"Std. dev. treated":                  {field: review.SDTreated},
		"S.D. (control)":                     {field: review.SDControl},
		"Standard error of the mean treated": {field: review.SETreated},
		"Effect size":                        {field: review.Estimate},
		"OR":                                 {field: review.Estimate, measure: effect.OddsRatio},
		"Odds Ratio":                         {field: review.Estimate, measure: effect.OddsRatio},
		"adjusted HR":                        {field: review.Estimate, measure: effect.HazardRatio},
		"Relative risk":                      {field: review.Estimate, measure: effect.RiskRatio},
		"Mean difference":                    {field: review.Estimate, measure: effect.MeanDifference},
		"Weighted mean difference":           {field: review.Estimate, measure: effect.MeanDifference},
		"WMD":                                {field: review.Estimate, measure: effect.MeanDifference},
		"Mean diff.":                         {field: review.Estimate, measure: effect.MeanDifference},
		"Standardized mean difference":       {field: review.Estimate, measure: effect.StandardisedMeanDifference},
		"log OR":                             {field: review.AnalysisEstimate, measure: effect.OddsRatio},
		"ln(RR)":                             {field: review.AnalysisEstimate, measure: effect.RiskRatio},
		"logHR":                              {field: review.AnalysisEstimate, measure: effect.HazardRatio},
		"y":                                  {field: review.AnalysisEstimate},
		"SE":                                 {field: review.StandardError},
		"Std. error":                         {field: review.StandardError},
		"SE (log OR)":                        {field: review.StandardError, measure: effect.OddsRatio},
		"standard error of mean difference":  {field: review.StandardError, measure: effect.MeanDifference},
		"Lower":                              {field: review.LimitLow},
		"Upper limit":                        {field: review.LimitHigh},
		"CI lower":                           {field: review.LimitLow},
		"95% CI low":                         {field: review.LimitLow, level: 0.95},
		"95% confidence interval, upper":     {field: review.LimitHigh, level: 0.95},
		"Lower 90% confidence limit":         {field: review.LimitLow, level: 0.9},
		"97.5% CI upper":                     {field: review.LimitHigh, level: 0.975},
		"CI95 low":                           {field: review.LimitLow, level: 0.95},
		"HR upper limit (99% CI)":            {field: review.LimitHigh, measure: effect.HazardRatio, level: 0.99},
		"log OR, CI low":                     {field: review.AnalysisLow, measure: effect.OddsRatio},
		"P-value":                            {field: review.PValue},
		"p":                                  {field: review.PValue},
	} {
		if got, ok := recognise(header); !ok || got != want {
			t.Errorf("%q is read as %+v, want %+v", header, got, want)
		}
	}
	for _, header := range []string{"", "  ", "Events (%)", "SE of OR", "latitude", "events per arm", "Deaths, drug arm", "95%", "lower back pain", "control", strings.Repeat("study ", 100)} {
		if got, ok := recognise(header); ok {
			t.Errorf("%q is read as %v, want nothing", header, got.field)
		}
	}
}

// TestEveryFieldNamesItself holds the synonyms to the fields' own names, and
// keeps one word from meaning two fields.
func TestEveryFieldNamesItself(t *testing.T) {
	for _, name := range review.FieldNames() {
		m, ok := recognise(name)
		if !ok || m.field.String() != name {
			t.Errorf("%q is read as %q", name, m.field)
		}
	}
	owner := map[string]review.Field{}
	for field, words := range synonyms {
		for _, word := range words {
			phrase, _ := fold(word)
			if other, taken := owner[phrase]; taken && other != field {
				t.Errorf("%q means both %s and %s", word, other, field)
			}
			owner[phrase] = field
			if m, _ := recognise(word); m.field != field {
				t.Errorf("%q of %s is read as %s", word, field, m.field)
			}
		}
	}
}

// TestHeaderError shows the call that says which column is which.
func TestHeaderError(t *testing.T) {
	for _, tt := range []struct {
		name, text string
		want       []string // --column flags
	}{
		{"names of a language unknown", "Title of the sheet\n\nTekijä;Vuosi;Deaths, drug arm;Patients, drug arm;Deaths, placebo;Patients, placebo\nA;2001;3;40;5;50\nB;2002;4;50;5;55\n",
			[]string{`"study=Tekijä"`, `"events treated=Deaths, drug arm"`, `"total treated=Patients, drug arm"`}},
		{"nothing known", "Tekijä,Wert,Fehler\nA,0.5,0.2\nB,0.6,0.1\n", []string{`"study=Tekijä"`, `"estimate=Wert"`, `"se=Fehler"`}},
		{"years are no results", "Tekijä,Vuosi,Wert,Fehler\nA,2001,0.5,0.2\nB,2002,0.6,0.1\n", []string{`"study=Tekijä"`, `"estimate=Wert"`, `"se=Fehler"`}},
		{"order told by words", "Trial,Patients drug,Deaths drug,Patients other,Deaths other\nA,40,3,50,5\nB,50,4,55,5\n",
			[]string{`"events treated=Deaths drug"`, `"total treated=Patients drug"`, `"events control=Deaths other"`, `"total control=Patients other"`}},
	} {
		_, _, err := Read(context.Background(), []byte(tt.text), "trials.csv", Options{})
		var header *HeaderError
		if !errors.As(err, &header) {
			t.Fatalf("%s: error %v", tt.name, err)
		}
		call := "steelyard pool trials.csv"
		for _, flag := range tt.want {
			call += " --column " + flag
		}
		if !strings.HasSuffix(err.Error(), "\n  "+call) {
			t.Errorf("%s:\n%v\nshould end with\n  %s", tt.name, err, call)
		}
		o := Options{Columns: map[string]string{}}
		for _, c := range header.Columns {
			field, text, err := ParseColumn(c)
			if err != nil {
				t.Errorf("%s: %v", tt.name, err)
			}
			o.Columns[field] = text
		}
		if x, _, err := Read(context.Background(), []byte(tt.text), "trials.csv", o); err != nil || len(x.Studies) != 2 || len(x.Studies[0].Numbers) < 2 {
			t.Errorf("%s: the call shown does not work: %v", tt.name, err)
		}
	}
}

// TestNoHeader explains sheets that hold no table.
func TestNoHeader(t *testing.T) {
	for _, text := range []string{"hello\n", "1,2,3\n4,5,6\n", "study\nA\nB\n"} {
		_, _, err := Read(context.Background(), []byte(text), "a.csv", Options{})
		var header *HeaderError
		if !errors.As(err, &header) || !strings.Contains(err.Error(), "header") {
			t.Errorf("%q: %v", text, err)
		}
	}
	_, _, err := Read(context.Background(), []byte("study,y,se\n"), "a.csv", Options{})
	if !errors.Is(err, ErrNoStudies) || !strings.Contains(err.Error(), "row 1") {
		t.Errorf("a header alone: %v", err)
	}
}

// TestIntervalInOneCell: a column that holds both limits, the commonest form of a
// published table, is to be parted, and is not taken for a percentage.
func TestIntervalInOneCell(t *testing.T) {
	for _, header := range []string{"95% CI", "OR (95% CI)", "ci", "Confidence interval"} {
		_, _, err := Read(context.Background(), []byte("study\todds ratio\t"+header+"\nA\t0.7\t0.5 to 0.9\n"), "a.tsv", Options{})
		if err == nil || !strings.Contains(err.Error(), "part them into two columns, ci low and ci high") || strings.Contains(err.Error(), "percentage") {
			t.Errorf("%q: %v", header, err)
		}
	}
}

// TestLowAndHigh: limits headed low and high beside an estimate are its limits, and
// the ends of a scale are not.
func TestLowAndHigh(t *testing.T) {
	got := lines(mustRead(t, []byte("study,OR,low,high,scale low,scale high\nA,0.8,0.5,1.3,0,10\n"), "a.csv", Options{}))
	if len(got) != 1 || !strings.Contains(got[0], "ci low=0.5|ci high=1.3") || !strings.Contains(got[0], "scale low=0|scale high=10") {
		t.Errorf("read as %q", got)
	}
}

// TestColumnFlag maps a header of a two-row header, and refuses an unknown one.
func TestColumnFlag(t *testing.T) {
	rows := table{{"Who", "Drug", nil, "Nothing", nil}, {nil, "Falls", "People", "Falls", "People"}, {"A", 1, 20, 2, 21}}
	o := Options{Columns: map[string]string{"study": "who", "events treated": "Drug Falls", "total treated": "Drug People", "events control": "Nothing Falls", "total control": "Nothing People"}}
	want := []string{"A||||unspecified||events treated=1|total treated=20|events control=2|total control=21"}
	for name, data := range map[string][]byte{"a.csv": rows.csv(t), "a.xlsx": rows.xlsx(t, "B1:C1", "D1:E1")} {
		if got := lines(mustRead(t, data, name, o)); !slices.Equal(got, want) {
			t.Errorf("%s: %q", name, got)
		}
	}
	_, _, err := Read(context.Background(), []byte("study,y,se\nA,1,1\n"), "a.csv", Options{Columns: map[string]string{"note": "Remarc"}})
	var column *ColumnError
	if !errors.As(err, &column) || column.Header != "Remarc" || !strings.Contains(err.Error(), `"study", "y", "se"`) {
		t.Errorf("unknown header: %v", err)
	}
	if _, _, err := Read(context.Background(), []byte("study,y,se\nA,1,1\n"), "a.csv", Options{Columns: map[string]string{"notes and such": "se"}}); err == nil || !strings.HasSuffix(err.Error(), "did you mean note?") {
		t.Errorf("unknown field: %v", err)
	}
}

// TestParseColumn splits at the first equals sign only.
func TestParseColumn(t *testing.T) {
	for _, tt := range []struct{ flag, field, header string }{
		{"events treated=Deaths, drug arm", "events treated", "Deaths, drug arm"},
		{" Events_Treated = p=0.05 ", "events treated", "p=0.05"},
		{"year=Published", "date", "Published"},
	} {
		field, header, err := ParseColumn(tt.flag)
		if err != nil || field != tt.field || header != tt.header {
			t.Errorf("%q: %q, %q, %v", tt.flag, field, header, err)
		}
	}
	for _, flag := range []string{"", "study", "=x", "study=", "nonsense=x"} {
		if _, _, err := ParseColumn(flag); err == nil {
			t.Errorf("%q is taken", flag)
		}
	}
}

// book returns a workbook with several sheets.
func book(t *testing.T, names []string, tables map[string]table, hidden ...string) []byte {
	t.Helper()
	f := excelize.NewFile()
	defer f.Close()
	for i, name := range names {
		if i == 0 {
			if err := f.SetSheetName("Sheet1", name); err != nil {
				t.Fatal(err)
			}
		} else if _, err := f.NewSheet(name); err != nil {
			t.Fatal(err)
		}
		tables[name].fill(t, f, name)
	}
	for _, name := range hidden {
		if err := f.SetSheetVisible(name, false); err != nil {
			t.Fatal(err)
		}
	}
	return saved(t, f)
}

// TestSheetChoice takes the one visible sheet with a table, else asks.
func TestSheetChoice(t *testing.T) {
	studies := table{{"study", "y", "se"}, {"A", 1, 1}}
	text := table{{"Read me first"}, {"nothing here"}}
	tables := map[string]table{"readme": text, "trials": studies, "Guide": studies, "lists": studies, "more trials": studies}
	x := mustRead(t, book(t, []string{"Guide", "readme", "trials", "lists"}, tables), "a.xlsx", Options{})
	if x.Source.Sheet != "trials" || x.Studies[0].Row.String() != "trials row 2" {
		t.Errorf("read %q, first row %s", x.Source.Sheet, x.Studies[0].Row)
	}
	x = mustRead(t, book(t, []string{"trials", "more trials"}, tables, "more trials"), "a.xlsx", Options{})
	if got := said(x); x.Source.Sheet != "trials" || !slices.Equal(got, []string{"warning F9 "}) {
		t.Errorf("beside a hidden table: %q, findings %q", x.Source.Sheet, got)
	}
	both := book(t, []string{"trials", "more trials"}, tables)
	_, _, err := Read(context.Background(), both, "a.xlsx", Options{})
	var sheets *SheetError
	if !errors.As(err, &sheets) || !strings.Contains(err.Error(), `"trials", "more trials"`) || !strings.Contains(err.Error(), "--sheet trials") {
		t.Errorf("two tables: %v", err)
	}
	if x := mustRead(t, both, "a.xlsx", Options{Sheet: "More Trials"}); x.Source.Sheet != "more trials" {
		t.Errorf("asked for another: %q", x.Source.Sheet)
	}
	for _, o := range []Options{{Sheet: "nope"}, {Sheet: "readme"}} {
		if _, _, err := Read(context.Background(), book(t, []string{"readme", "trials"}, tables), "a.xlsx", o); err == nil {
			t.Errorf("sheet %q is taken", o.Sheet)
		}
	}
	if _, _, err := Read(context.Background(), studies.csv(t), "a.csv", Options{Sheet: "trials"}); !errors.As(err, &sheets) {
		t.Errorf("a sheet of a text file: %v", err)
	}
}

// TestNoWrongGuess: a header that says one thing is never proposed as another; the
// message says what to do about it instead.
func TestNoWrongGuess(t *testing.T) {
	const counts, means = "A,12,100,20,100\nB,10,90,15,95\n", "A,10.1,0.45,50,12.0,0.5,48\nB,9.5,0.36,60,10.9,0.38,61\n"
	for _, tt := range []struct {
		header, rows string
		want         []string // the guess
		word         string   // of the message
	}{
		{"trial,mean_t,se_t,n_t,mean_c,se_c,n_c", means, []string{"mean treated=mean_t", "se treated=se_t", "total treated=n_t", "mean control=mean_c", "se control=se_c", "total control=n_c"}, ""},
		{"trial,mean_t,sd_t,n_t,mean_c,sd_c,n_c", means, []string{"mean treated=mean_t", "sd treated=sd_t", "total treated=n_t", "mean control=mean_c", "sd control=sd_c", "total control=n_c"}, ""},
		{"trial,n_c,n_t,sd_c,sd_t,mean_c,mean_t", means, []string{"mean treated=mean_t", "sd treated=sd_t", "total treated=n_t", "mean control=mean_c", "sd control=sd_c", "total control=n_c"}, ""},
		{"study,yi,vi", "A,1,2\nB,1,2\n", nil, "square root"},
		{"study,ai,bi,ci,di", counts, nil, "without the event"},
		{"study,beta,upper one,lower one", "A,1,3,0.5\nB,1,3,0.5\n", []string{"estimate=beta", "ci low=lower one", "ci high=upper one"}, ""},
		{"study,beta,variance", "A,1,2\nB,1,2\n", nil, "square root"},
		{"study,mean treated,var treated,total treated,mean control,var control,total control", means, nil, "lacks sd treated and sd control"},
		{"study,mean treated,SD/SE treated,total treated,mean control,SD/SE control,total control", means, nil, "part them into two columns"},
		{"study,Events treated (%),Total treated,Events control (%),Total control", counts, nil, "percentage"},
		{"study,% events treated,Total treated,% events control,Total control", counts, nil, "lacks events treated and events control"},
		{"study,Non-events treated,Total treated,Non-events control,Total control", counts, nil, "without the event"},
		{"study,No events treated,Total treated,No events control,Total control", counts, nil, "without the event"},
		{"study,Survivors treated,Total treated,Survivors control,Total control", counts, nil, "without the event"},
		{"study,events T,no events T,events C,no events C", counts, nil, "without the event"},
		{"study,Group,Mean,SD,N", "A,Drug,1,2,30\nA,Placebo,2,3,31\nB,Drug,1,2,30\nB,Placebo,2,3,31\n", nil, `one row for each arm ("Group": "Drug", "Placebo")`},
	} {
		_, _, err := Read(context.Background(), []byte(tt.header+"\n"+tt.rows), "a.csv", Options{})
		var header *HeaderError
		if !errors.As(err, &header) {
			t.Errorf("%s: error %v", tt.header, err)
			continue
		}
		if !slices.Equal(header.Columns, tt.want) || !strings.Contains(err.Error(), tt.word) {
			t.Errorf("%s: guess %q, want %q; message lacks %q: %v", tt.header, header.Columns, tt.want, tt.word, err)
		}
	}
}

// TestCallShown shows the path and the sheet as they were typed.
func TestCallShown(t *testing.T) {
	path := filepath.Join(t.TempDir(), "my trials.csv")
	if err := os.WriteFile(path, []byte("Tekijä,Wert,Fehler\nA,0.5,0.2\nB,0.6,0.1\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	_, _, err := Open(context.Background(), path, Options{})
	if err == nil || !strings.Contains(err.Error(), "\n  steelyard pool \""+path+"\" --column") {
		t.Errorf("error %v", err)
	}
	data := book(t, []string{"a b", "other"}, map[string]table{"a b": {{"Tekijä", "Wert", "Fehler"}, {"A", 0.5, 0.2}, {"B", 0.6, 0.1}}, "other": {{"x"}}})
	path = filepath.Join(t.TempDir(), "a.xlsx")
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	if _, _, err := Open(context.Background(), path, Options{Sheet: "a b"}); err == nil || !strings.Contains(err.Error(), "a.xlsx --sheet \"a b\" --column") {
		t.Errorf("error %v", err)
	}
}

// TestColumnByLetter chooses among columns of one header by the letter.
func TestColumnByLetter(t *testing.T) {
	text := []byte("study,events treated,total treated,events control,total control,events treated\nA,12,100,20,100,13\n")
	_, _, err := Read(context.Background(), text, "a.csv", Options{Columns: map[string]string{"events treated": "Events treated"}})
	var column *ColumnError
	if !errors.As(err, &column) || !strings.Contains(err.Error(), `B and F`) || !strings.HasSuffix(err.Error(), `--column "events treated=column B"`) {
		t.Errorf("error %v", err)
	}
	x := mustRead(t, text, "a.csv", Options{})
	if len(x.Findings) != 1 || !strings.HasSuffix(x.Findings[0].Message, `--column "events treated=column F"`) {
		t.Errorf("findings %+v", x.Findings)
	}
	for letter, want := range map[string]float64{"column B": 12, "Column f": 13} {
		x := mustRead(t, text, "a.csv", Options{Columns: map[string]string{"events treated": letter}})
		if n, _ := x.Studies[0].Number(review.EventsTreated); n.Value != want || len(x.Findings) > 0 && x.Findings[0].Severity == review.Error {
			t.Errorf("%s: %v, findings %+v", letter, n.Value, x.Findings)
		}
	}
	if _, _, err := Read(context.Background(), text, "a.csv", Options{Columns: map[string]string{"events treated": "column Z"}}); !errors.As(err, &column) || len(column.Twins) != 0 {
		t.Errorf("a column that is not there: %v", err)
	}
}

// TestRowsOfArms warns of a table with one row for each arm and leaves other
// tables with a column of groups alone.
func TestRowsOfArms(t *testing.T) {
	x := mustRead(t, []byte("Study,Group,Events,Total\nA,Drug,12,100\nA,Placebo,20,101\nB,Drug,10,90\nB,Placebo,15,95\n"), "a.csv", Options{})
	if len(x.Findings) != 1 || x.Findings[0].Severity != review.Warning || !strings.Contains(x.Findings[0].Message, `("Group": "Drug", "Placebo")`) {
		t.Errorf("findings %+v", x.Findings)
	}
	for _, text := range []string{
		"Study,Group,Events,Total\nA,adults,12,100\nB,children,10,90\n",
		"Study,Treatment,Events,Total\nA,Drug,12,100\nA,Placebo,20,101\nB,Drug,10,90\n",
		"Study,Group,estimate,se\nA,men,12,100\nA,women,20,101\n",
	} {
		for _, f := range mustRead(t, []byte(text), "a.csv", Options{}).Findings {
			if strings.Contains(f.Message, "one row for each arm") {
				t.Errorf("%q: %s", text, f.Message)
			}
		}
	}
}

// TestNearestFields suggests what was meant, or a few of the commonest.
func TestNearestFields(t *testing.T) {
	for text, want := range map[string]string{"evnts treated": "events treated", "ci lo": "ci low", "standard eror": "study, date", "risk of bais": "risk of bias", "foo": "study, date"} {
		_, _, err := ParseColumn(text + "=x")
		var field *FieldError
		if !errors.As(err, &field) || !strings.Contains(err.Error(), want) || len(err.Error()) > 200 {
			t.Errorf("%s: %v, want %q", text, err, want)
		}
	}
}

// TestForeignWords reads plain headers in French, German and Spanish.
func TestForeignWords(t *testing.T) {
	for _, tt := range []struct{ header, want string }{
		{"Étude;Année;OR;IC inf;IC sup", "estimate ci low ci high"},
		{"Etude;Année;OR;IC 95% inférieur;IC 95% supérieur", "estimate ci low ci high ci level"},
		{"Auteurs;Année de publication;OR;borne inférieure;borne supérieure", "estimate ci low ci high"},
		{"Studie;Jahr;OR;untere Grenze;obere Grenze", "estimate ci low ci high"},
		{"Studie;Jahr;OR;KI unten;KI oben", "estimate ci low ci high"},
		{"Estudio;Año;OR;límite inferior;límite superior", "estimate ci low ci high"},
		{"Estudio;Año;OR;IC 95% inferior;IC 95% superior", "estimate ci low ci high ci level"},
	} {
		x := mustRead(t, []byte(tt.header+"\nA;2001;0,7;0,5;0,98\nB;2005;0,8;0,6;1,07\n"), "a.csv", Options{})
		var fields []string
		for _, n := range x.Studies[0].Numbers {
			fields = append(fields, n.Field.String())
		}
		if got := strings.Join(fields, " "); got != tt.want || x.Studies[0].Date.Year != 2001 || x.Studies[0].Measure != effect.OddsRatio {
			t.Errorf("%s: %q, want %q; date %v", tt.header, got, tt.want, x.Studies[0].Date)
		}
	}
	for header, want := range map[string]review.Field{
		"Ereignisse Behandlung": review.EventsTreated, "Gesamt Kontrolle": review.TotalControl, "Ereignisse (Kontrollgruppe)": review.EventsControl,
		"événements traités": review.EventsTreated, "total contrôle": review.TotalControl, "Effectif traitement": review.TotalTreated, "eventos tratamiento": review.EventsTreated,
		"Mittelwert Behandlung": review.MeanTreated, "Standardabweichung Kontrolle": review.SDControl, "écart-type témoins": review.SDControl, "Media tratamiento": review.MeanTreated,
		"Standardfehler": review.StandardError, "p-Wert": review.PValue, "Effektschätzer": review.Estimate,
	} {
		if m, ok := recognise(header); !ok || m.field != want {
			t.Errorf("%q is read as %q, want %q", header, m.field, want)
		}
	}
}
