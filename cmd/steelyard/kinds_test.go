package main

import (
	"encoding/json"
	"fmt"
	"math"
	"strings"
	"testing"

	"steelyard/meta/synthesis"
)

// pooledText pools a sheet given as text.
func pooledText(t *testing.T, sheet string, args ...string) synthesis.Document {
	t.Helper()
	stdout, stderr, _ := call(t, sheet, append([]string{"pool", "-", "--format", "json"}, args...)...)
	var d synthesis.Document
	if err := json.Unmarshal([]byte(stdout), &d); err != nil {
		t.Fatalf("%s: %v, %s", sheet, err, stderr)
	}
	return d
}

// TestPublishedConversions takes the worked examples of the literature from a
// sheet to an effect. Sources: testdata/checks/PUBLISHED.md, by section; closed
// forms where named.
func TestPublishedConversions(t *testing.T) {
	crossover := "study,design,mean treated,sd treated,mean control,sd control,total,correlation,sd of the difference\n"
	for _, c := range []struct {
		name, sheet, measure string
		estimate, se, within float64 // on the analysis scale; the digits that are printed
		converted            bool
	}{
		{"§8 se of a difference from p", "study,mean difference,p,n treated,n control\nA,3.8,0.008,25,22\n", "", 3.8, 1.369100, 5e-7, true},
		{"§8 se of a difference from t", "study,mean difference,t\nA,3.8,2.775545\n", "", 3.8, 1.369100, 5e-6, false},
		{"§8 means with p", "study,mean treated,mean control,p,n treated,n control\nA,10,6.2,0.008,25,22\n", "", 3.8, 1.369100, 5e-7, true},
		{"§9 cross-over by the SD of differences", crossover + "A,crossover,7,2.38,6.5,2.21,10,,2\n", "mean difference", 0.5, 0.632456, 5e-7, false},
		{"§9 cross-over by a correlation", crossover + "A,cross-over,7,2.38,6.5,2.21,10,0.68,\n", "mean difference", 0.5, 0.582681, 5e-7, true},
		{"§9 cross-over, standardised", crossover + "A,Cross-over trial,7,2.38,6.5,2.21,10,0.68,\n", "standardised mean difference", 0.217716, 0.255963, 5e-7, true},
		{"§10 observed minus expected", "study,O-E,V\nA,-16.466,128.81\n", "hazard ratio", math.Log(0.88), 1 / math.Sqrt(128.81), 5e-6, false},
		{"§10 its interval", "study,HR,ci low,ci high\nA,0.88,0.7404,1.0459\n", "", math.Log(0.88), 1 / math.Sqrt(128.81), 2e-5, false},
		// §16: SD = range/ξ(n), ξ(50) = 4.4867 by the approximation; a symmetric range has
		// its median as mean, so that both arms alike differ by 0 with se SD·√(2/50).
		{"§16 range", "study,median treated,min treated,max treated,n treated,median control,min control,max control,n control\nA,10,0,20,50,10,0,20,50\n", "",
			0, 20 / 4.4867 * math.Sqrt(2./50), 2e-5, true},
		// Closed forms of the handbook: 1/(1/5+1/9) and logs of rates; artanh; logit; Chinn's factor.
		{"rate ratio", "study,events treated,person years treated,events control,person years control\nA,5,100,9,120\n", "",
			math.Log(5 / 100. / (9 / 120.)), math.Sqrt(1/5. + 1/9.), 1e-12, false},
		{"correlation", "study,r,n\nA,0.3,52\n", "", math.Atanh(0.3), 1 / 7., 1e-12, false},
		{"proportion", "study,events,total\nA,3,50\n", "", math.Log(3 / 47.), math.Sqrt(1/3. + 1/47.), 1e-12, false},
		{"arcsine proportion", "study,events,total\nA,3,50\n", "arcsine proportion", math.Asin(math.Sqrt(3 / 50.)), math.Sqrt(1 / 200.), 1e-12, false},
		{"rate", "study,events,person time\nA,9,120\n", "", math.Log(9 / 120.), 1 / 3., 1e-12, false},
		{"hazard ratio with events and people", "study,HR,events,n treated,n control\nA,0.8,40,100,100\n", "", math.Log(0.8), 1 / math.Sqrt(10), 1e-12, true},
		{"hazard ratio with events and shares", "study,HR,events,share treated,share control\nA,0.8,36,0.6667,0.3333\n", "", math.Log(0.8), 1 / math.Sqrt(8), 1e-4, true},
		{"hazard ratio from p and events", "study,p,direction,events,n treated,n control\nA,0.0455003,lower,40,100,100\n", "hazard ratio", -2 / math.Sqrt(10), 1 / math.Sqrt(10), 1e-6, true},
		{"log-rank z", "study,z,events treated,events control\nA,-2,20,20\n", "hazard ratio", -2 / math.Sqrt(10), 1 / math.Sqrt(10), 1e-12, true},
		{"odds ratio as standardised difference", "study,OR,se\nA,2,0.5\n", "standardised mean difference", math.Log(2) * math.Sqrt(3) / math.Pi, 0.5 * math.Sqrt(3) / math.Pi, 1e-12, true},
		{"counts as standardised difference", "study,events treated,total treated,events control,total control\nA,10,20,5,20\n", "standardised mean difference",
			math.Log(3) * math.Sqrt(3) / math.Pi, math.Sqrt(1/10.+1/10.+1/5.+1/15.) * math.Sqrt(3) / math.Pi, 1e-12, true},
		{"risk difference", "study,events treated,total treated,events control,total control\nA,10,20,5,20\n", "risk difference", 0.25, math.Sqrt(0.25/20 + 0.1875/20), 1e-12, false},
		{"clusters", "study,events treated,total treated,events control,total control,design,cluster size,icc\nA,10,20,5,20,cluster randomised,21,0.05\n", "odds ratio",
			math.Log(3), math.Sqrt(2 * (1/10. + 1/10. + 1/5. + 1/15.)), 1e-12, true},
		{"clusters, reported", "study,OR,se,design,cluster size,icc\nA,2,0.5,cluster,21,0.05\n", "", math.Log(2), 0.5 * math.Sqrt2, 1e-12, true},
		{"clusters, allowed for", "study,OR,se,design,cluster size,icc,adjusted\nA,2,0.5,cluster,21,0.05,yes\n", "", math.Log(2), 0.5, 1e-12, false},
		{"ratio of means", "study,mean treated,sd treated,n treated,mean control,sd control,n control\nA,10,2,25,8,3,36\n", "ratio of means",
			math.Log(10 / 8.), math.Sqrt(4/(25*100.) + 9/(36*64.)), 1e-12, false},
		// Handbook 6.5.2.8: SD of the change √(4²+5²−2·0.5·4·5) = √21 in either arm.
		{"changes", "study,mean treated,sd treated,n treated,baseline mean treated,baseline sd treated,mean control,sd control,n control,baseline mean control,baseline sd control,correlation\n" +
			"A,10,5,42,14,4,12,5,42,13,4,0.5\n", "", -3, 1, 1e-12, true},
		// t(0.975, 24) = 2.063899 and t(0.975, 35) = 2.030108 of tables: SD 5 and 6.
		{"means with limits", "study,mean treated,ci low treated,ci high treated,n treated,mean control,95% CI lower control,95% CI upper control,n control\n" +
			"A,10,7.936101,12.063899,25,12,9.969892,14.030108,36\n", "", -2, math.Sqrt2, 1e-5, false},
		{"changes as given", "study,mean treated,sd treated,n treated,baseline mean treated,baseline sd treated,mean control,sd control,n control,baseline mean control,baseline sd control,correlation,result type\n" +
			"A,-4,6,72,14,4,-1,6,72,13,4,0.5,change\n", "", -3, 1, 1e-12, false},
	} {
		t.Run(c.name, func(t *testing.T) {
			var args []string
			if c.measure != "" {
				args = []string{"--measure", c.measure}
			}
			d := pooledText(t, c.sheet, args...)
			if len(d.Outcomes) != 1 || len(d.Outcomes[0].Studies) != 1 {
				t.Fatalf("%+v", d.Outcomes)
			}
			s := d.Outcomes[0].Studies[0]
			if math.Abs(s.Estimate-c.estimate) > c.within || math.Abs(s.SE-c.se) > c.within || s.Converted != c.converted {
				t.Errorf("%v (%v), converted %v; want %v (%v), %v", s.Estimate, s.SE, s.Converted, c.estimate, c.se, c.converted)
			}
			if len(d.Outcomes[0].Conversions) == 0 && !strings.Contains(c.sheet, "mean difference,t") {
				t.Error("no conversion is on record")
			}
			checkEffectFormulas(t, c.sheet, args, s.Estimate, s.SE)
		})
	}
}

// betaBlockers are events and totals of 22 trials (BUGS Examples Volume I, after
// Yusuf et al. 1985) with the log odds ratio and its standard error as printed in
// Gelman et al., Bayesian Data Analysis, table 5.4: PUBLISHED.md §3.
const betaBlockers = `3,38,3,39,0.028,0.850
7,114,14,116,-0.741,0.483
5,69,11,93,-0.541,0.565
102,1533,127,1520,-0.246,0.138
28,355,27,365,0.069,0.281
4,59,6,52,-0.584,0.676
98,945,152,939,-0.512,0.139
60,632,48,471,-0.079,0.204
25,278,37,282,-0.424,0.274
138,1916,188,1921,-0.335,0.117
64,873,52,583,-0.213,0.195
45,263,47,266,-0.039,0.229
9,291,16,293,-0.593,0.425
57,858,45,883,0.282,0.205
25,154,31,147,-0.321,0.298
33,207,38,213,-0.135,0.261
28,251,12,122,0.141,0.364
8,151,6,154,0.322,0.553
6,174,3,134,0.444,0.717
32,209,40,218,-0.218,0.260
27,391,43,364,-0.591,0.257
22,680,39,674,-0.608,0.272`

// TestBetaBlockers: the counts give the printed log odds ratios to three decimals.
func TestBetaBlockers(t *testing.T) {
	sheet := "study,events treated,total treated,events control,total control\n"
	var want [][]float64
	for i, line := range strings.Split(betaBlockers, "\n") {
		var row []float64
		if err := json.Unmarshal([]byte("["+line+"]"), &row); err != nil {
			t.Fatal(err)
		}
		want = append(want, row)
		sheet += fmt.Sprintf("%d,%v,%v,%v,%v\n", i+1, row[0], row[1], row[2], row[3])
	}
	d := pooledText(t, sheet, "--measure", "odds ratio")
	for i, s := range d.Outcomes[0].Studies {
		if math.Abs(s.Estimate-want[i][4]) > 0.0005+1e-9 || math.Abs(s.SE-want[i][5]) > 0.0005+1e-9 {
			t.Errorf("trial %d: %.4f (%.4f), printed %v (%v)", i+1, s.Estimate, s.SE, want[i][4], want[i][5])
		}
	}
	// restricted maximum likelihood: mean −0.247494 (se 0.060531): PUBLISHED.md §3, recalculated there.
	d = pooledText(t, sheet, "--measure", "odds ratio", "--interval", "wald")
	if p := d.Outcomes[0].Pooled; math.Abs(p.Estimate+0.247494) > 1e-5 || math.Abs(p.SE-0.060531) > 1e-5 {
		t.Errorf("pooled %v (%v)", p.Estimate, p.SE)
	}
}

// TestConversionCells: a conversion on record names the cells that its numbers
// come from, and only those.
func TestConversionCells(t *testing.T) {
	sheet := "study,mean treated,se treated,n treated,median control,q1 control,q3 control,n control\nA,10,1,25,12,9,15,36\n"
	d := pooledText(t, sheet)
	want := []map[string]float64{
		{"C2": 1, "D2": 25},
		{"E2": 12, "F2": 9, "G2": 15, "H2": 36},
		{"B2": 10, "sd treated": 5, "D2": 25, "mean control": 12, "sd control": 0, "H2": 36},
	}
	got := d.Outcomes[0].Conversions
	if len(got) != len(want) {
		t.Fatalf("%d conversions: %+v", len(got), got)
	}
	for i, w := range want {
		if got[i].Source == "" || got[i].What == "" || len(got[i].From) != len(w) {
			t.Errorf("conversion %d: %+v", i, got[i])
		}
		for name, value := range w {
			have, ok := got[i].From[name]
			if !ok || (value != 0 && have != value) {
				t.Errorf("conversion %d: %s = %v, want %v", i, name, have, value)
			}
		}
	}
}

// TestMixedKinds pools one effect, the log risk ratio of 10 of 100 against 20 of
// 100, from counts, limits at 90% and a p-value, and repeats it without what is
// converted. The closed form is in the test.
func TestMixedKinds(t *testing.T) {
	y, se := math.Log(0.5), math.Sqrt(1/10.-1/100.+1/20.-1/100.)
	const z90 = 1.6448536269514722 // standard normal, 95%
	sheet := "study,events treated,total treated,events control,total control,RR,ci low,ci high,ci level,p\n" +
		"A,10,100,20,100,,,,,\nB,10,100,20,100,,,,,\nE,10,100,20,100,,,,,\n" +
		fmt.Sprintf("C,,,,,0.5,%v,%v,0.9,\n", math.Exp(y-z90*se), math.Exp(y+z90*se)) +
		fmt.Sprintf("D,,,,,0.5,,,,%v\n", math.Erfc(-y/se/math.Sqrt2))
	d := pooledText(t, sheet)
	o := d.Outcomes[0]
	if o.K != 5 || math.Abs(o.Pooled.Estimate-y) > 1e-9 {
		t.Fatalf("k %d, estimate %v, want %v", o.K, o.Pooled.Estimate, y)
	}
	for i, s := range o.Studies {
		if math.Abs(s.SE-se) > 1e-9 || s.Converted != (i > 2) {
			t.Errorf("%s: se %v, converted %v, want %v", s.Study, s.SE, s.Converted, se)
		}
	}
	if o.Without == nil || o.Without.K != 3 || math.Abs(o.Without.Estimate-y) > 1e-9 {
		t.Fatalf("without: %+v", o.Without)
	}
	alone := pooledText(t, sheet, "--where", "converted is no").Outcomes[0]
	if alone.K != 3 || alone.Rows != 3 || math.Abs(alone.Pooled.LnEvidence-o.Without.LnEvidence) > 1e-12 || alone.Without != nil {
		t.Errorf("with the filter %+v, beside %+v", alone.Pooled, o.Without)
	}
	if marked := pooledText(t, sheet, "--where", "converted is yes").Outcomes[0]; marked.K != 2 || marked.Studies[0].Study != "C" {
		t.Errorf("the converted alone: %+v", marked.Studies)
	}
	text, _, _ := call(t, sheet, "pool", "-")
	text = strings.Join(strings.Fields(text), " ")
	for _, says := range []string{"Unconverted only", "standard error worked out from a p-value"} {
		if !strings.Contains(text, says) {
			t.Errorf("the answer lacks %q:\n%s", says, text)
		}
	}
}

// TestPValuesAlone: studies with a p-value and no estimate are weighed by
// themselves. By hand: z of p 0.0455003 is 2, of 0.3173105 it is 1 (68% and 95.4%
// rules); Stouffer (√100·2 + √25·(−1))/√125.
func TestPValuesAlone(t *testing.T) {
	sheet := "study,estimate,se,p,direction,n\nA,1,0.5,,,\nB,2,0.5,,,\nC,,,0.04550026389635842,higher,100\nD,,,0.31731050786291415,lower,25\n"
	d := pooledText(t, sheet)
	o := d.Outcomes[0]
	if o.K != 2 || o.Rows != 4 || o.POnly == nil || len(o.POnly.Studies) != 2 || len(o.Excluded) != 2 {
		t.Fatalf("%+v", o)
	}
	z := (10*2 - 5*1) / math.Sqrt(125)
	if got := o.POnly.Stouffer; math.Abs(got.Z-z) > 1e-9 || math.Abs(got.P-math.Erfc(z/math.Sqrt2)) > 1e-9 {
		t.Errorf("Stouffer %+v, want z %v", got, z)
	}
	// Normal form of the evidence (Dudbridge 2024): (z² − 1)/2 + ln(√2·…) is checked in
	// its own package; here the same z by weigh must say the same.
	weighed, _, _ := call(t, "", "weigh", "--z", fmt.Sprint(o.POnly.Stouffer.Z), "--format", "json")
	var w synthesis.WeighingDocument
	if err := json.Unmarshal([]byte(weighed), &w); err != nil || math.Abs(w.LnEvidence-o.POnly.Stouffer.LnEvidence) > 1e-9 {
		t.Errorf("evidence %v, weigh says %v (%v)", o.POnly.Stouffer.LnEvidence, w.LnEvidence, err)
	}
	// Fisher: −2Σ ln of the one-sided p-values is chi-square on 4 df, whose upper tail
	// is e^(−x/2)(1 + x/2); for higher they are 0.02275 and 0.84134.
	x := -2 * (math.Log(math.Erfc(2/math.Sqrt2)/2) + math.Log(1-math.Erfc(1/math.Sqrt2)/2))
	if p := 2 * math.Exp(-x/2) * (1 + x/2); math.Abs(o.POnly.Fisher.P-p) > 1e-9 {
		t.Errorf("Fisher p %v, want %v", o.POnly.Fisher.P, p)
	}
	alone := pooledText(t, "study,estimate,se\nA,1,0.5\nB,2,0.5\n").Outcomes[0]
	if alone.Pooled.Estimate != o.Pooled.Estimate || alone.Pooled.LnEvidence != o.Pooled.LnEvidence {
		t.Error("p-values alone change the pooled result")
	}
	text, _, code := call(t, sheet, "pool", "-")
	if code != codeDone || !strings.Contains(text, "Evidence alone") || !strings.Contains(text, "together by Stouffer") {
		t.Errorf("exit %d:\n%s", code, text)
	}
	text, _, code = call(t, "study,p,direction,n\nC,0.03,higher,100\n", "pool", "-")
	if code != codeData || !strings.Contains(text, "Evidence alone") {
		t.Errorf("p-values only: exit %d:\n%s", code, text)
	}
}

// TestWithoutNull: a proportion is pooled, and weighed only against a stated null.
func TestWithoutNull(t *testing.T) {
	sheet := "study,events,total\nA,3,50\nB,6,60\nC,5,40\n"
	d := pooledText(t, sheet)
	o := d.Outcomes[0]
	if o.Measure != "proportion" || o.Scale != "logit" || o.Pooled.EvidenceFormDocument != nil || o.Pooled.TestDocument != nil || o.Pooled.Null != nil ||
		o.Doubter != nil || o.Posterior != nil || o.Studies[0].LnEvidence != nil || o.Tau == nil || !(o.Pooled.SE > 0) {
		t.Errorf("%+v", o)
	}
	text, _, code := call(t, sheet, "pool", "-")
	text = strings.Join(strings.Fields(text), " ")
	if code != codeDone || !strings.Contains(text, "not weighed: the measure, proportion, has no value of no effect; state one with --null") || strings.Contains(text, "Belief") {
		t.Errorf("exit %d:\n%s", code, text)
	}
	null := pooledText(t, sheet, "--null", "0.2").Outcomes[0]
	if null.Pooled.Estimate != o.Pooled.Estimate || math.Abs(*null.Pooled.Null-math.Log(0.25)) > 1e-12 || null.Pooled.LnEvidence == 0 {
		t.Errorf("with a null: %+v", null.Pooled)
	}
	if text, _, _ := call(t, sheet, "pool", "-", "--important", "0.1"); !strings.Contains(strings.Join(strings.Fields(text), " "), "give one with --null") {
		t.Errorf("important without a null:\n%s", text)
	}
	out := t.TempDir() + "/a.svg"
	_, stderr, code := call(t, sheet, "chart", "forest", "-", "--out", out)
	if code != codeData || !strings.Contains(stderr, "needs a null for its evidence rail: give --null") {
		t.Errorf("chart: exit %d, %s", code, stderr)
	}
	if _, stderr, code = call(t, sheet, "chart", "forest", "-", "--out", out, "--null", "0.2"); code != codeDone {
		t.Errorf("chart with a null: exit %d, %s", code, stderr)
	}
}

// TestReadingsInAnswer: both readings of doubtful commas are pooled.
func TestReadingsInAnswer(t *testing.T) {
	sheet := "study;mean difference;se\nA;1,234;1\nB;2,234;1\n"
	d := pooledText(t, sheet, "--effects", "common")
	found := 0
	for _, f := range d.Findings {
		for i, r := range f.Readings {
			found++
			want := []float64{1.734, 1734}[i] // the means of the two numbers as read
			if r.K != 2 || math.Abs(r.Estimate-want) > 1e-9 || math.Abs(r.SE-math.Sqrt(0.5)) > 1e-9 || r.EvidenceDocument == nil {
				t.Errorf("%s: %+v, want %v", r.Label, r.SubsetDocument, want)
			}
		}
	}
	if found != 2 {
		t.Errorf("%d readings", found)
	}
	text, _, _ := call(t, sheet, "pool", "-", "--effects", "common")
	if !strings.Contains(text, "commas as decimal marks: 1.7 (0.3 to 3.1)") || !strings.Contains(text, "commas between thousands: 1,734") {
		t.Errorf("%s", text)
	}
}

// TestKindRefusals: what cannot be used says why and what to do.
func TestKindRefusals(t *testing.T) {
	for _, c := range []struct{ sheet, measure, says string }{
		{"study,design,mean treated,sd treated,mean control,sd control,total\nA,crossover,7,2,6,2,10\n", "mean difference", "give the sd of the difference, or the correlation"},
		{"study,design,events treated,total treated,events control,total control\nA,crossover,1,10,2,10\n", "", "from a paired analysis"},
		{"study,design,mean treated,sd treated,mean control,sd control,n,correlation\nA,crossover,7,2,6,2,,0.5\n", "mean difference", "does not say how many people"},
		{"study,mean difference,t\nA,2,-3\n", "", "check the direction of both"},
		{"study,estimate,p\nA,0,0.5\n", "mean difference", "use the interval or the standard deviations"},
		{"study,estimate,p\nA,0.3,0.5\n", "proportion", "give se, limits, or the counts"},
		{"study,estimate,se,v\nA,0.3,,0.5\n", "mean difference", "the square root of the variance as se"},
		{"study,p,direction,n,estimate,se\nA,0.03,sideways,100,,\n", "", "higher, lower"},
		{"study,p,direction,n,estimate,se\nA,0.03,,100,,\n", "", "the direction of the effect"},
		{"study,RR,se\nA,0.5,0.1\n", "odds ratio", "cannot be pooled as odds ratio"},
		{"study,events,total\nA,1,10\n", "risk ratio", "use one of: proportion"},
		{"study,r,n\nA,0.5,10\n", "risk ratio", "use one of: correlation"},
		{"study,events treated,person time treated,events control,person time control\nA,1,10,2,10\n", "risk ratio", "use one of: rate ratio"},
		{"study,O-E,V\nA,1,10\n", "", "use one of: odds ratio, hazard ratio, rate ratio"},
		{"study,mean difference,se\nA,1,0.3\n", "standardised mean difference", "totals of both arms"},
		{"study,median treated,q1 treated,q3 treated,n treated,median control,q1 control,q3 control,n control\nA,10,11,20,50,10,5,20,50\n", "", "exchanged"},
		{"study,HR,events\nA,0.8,40\n", "", "no complete set of numbers"},
	} {
		var args []string
		if c.measure != "" {
			args = []string{"--measure", c.measure}
		}
		text, stderr, code := call(t, c.sheet, append([]string{"pool", "-"}, args...)...)
		plain := strings.Join(strings.Fields(text+stderr), " ")
		if code != codeData || !strings.Contains(plain, c.says) {
			t.Errorf("%s(%s): exit %d, want %q in:\n%s", c.sheet, c.measure, code, c.says, plain)
		}
	}
}

// TestDesignWarnings: clusters without an icc are pooled with a warning and what
// would come of some; a cross-over trial without a correlation likewise.
func TestDesignWarnings(t *testing.T) {
	d := pooledText(t, "study,OR,se,design,cluster size\nA,2,0.5,cluster,21\n")
	f := d.Findings[0]
	if f.Rule != "D7" || f.Severity != "warning" || len(f.Readings) != 3 {
		t.Fatalf("%+v", d.Findings)
	}
	for i, icc := range []float64{0.01, 0.05, 0.1} {
		if want := 0.5 * math.Sqrt(1+20*icc); math.Abs(f.Readings[i].SE-want) > 1e-12 {
			t.Errorf("%s: se %v, want %v", f.Readings[i].Label, f.Readings[i].SE, want)
		}
	}
	d = pooledText(t, "study,design,mean treated,sd treated,mean control,sd control,total\nA,crossover,7,2.38,6.5,2.21,10\n", "--measure", "mean difference")
	f = d.Findings[0]
	if f.Rule != "D8" || f.Severity != "error" || len(f.Readings) != 3 {
		t.Fatalf("%+v", d.Findings)
	}
	for i, r := range []float64{0.3, 0.5, 0.7} {
		want := math.Sqrt((2.38*2.38 + 2.21*2.21 - 2*r*2.38*2.21) / 10) // Cochrane Handbook 23.2.7
		if math.Abs(f.Readings[i].SE-want) > 1e-12 {
			t.Errorf("%s: se %v, want %v", f.Readings[i].Label, f.Readings[i].SE, want)
		}
	}
}
