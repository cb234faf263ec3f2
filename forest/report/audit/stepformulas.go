package audit

import (
	"math"
	"strings"

	"steelyard/meta/effect"
)

// stepFormula gives the formulas of one kind of conversion, in the order of what comes
// out; {1}, {2} … are the numbers that go in, {=1} the first that came out.
type stepFormula struct {
	what     string // how the record of the conversion begins
	ends     string // how it ends; blank: anyhow
	formulas []string
}

var stepFormulas = []stepFormula{
	{"standard deviation from the standard error of a mean", "", []string{"{1}*SQRT({2})"}},
	{"standard deviation from the interval of a mean", "", []string{"SQRT({4})*({2}-{1})/(2*TINV(1-{3},{4}-1))"}},
	{"change from baseline with a stated correlation", "", []string{"{1}-{3}", "SQRT({2}^2+{4}^2-2*{5}*{2}*{4})"}},
	{"correlation implied by three standard deviations", "", []string{"({1}^2+{2}^2-{3}^2)/(2*{1}*{2})"}},
	{"standard deviation of the differences within people", "", []string{"SQRT({1}^2+{2}^2-2*{3}*{1}*{2})"}},
	{"mean difference and its standard error from differences", "", []string{"{1}", "{2}/SQRT({3})"}},
	{"standardised mean difference and its standard error from paired means", "", []string{
		"({1}-{3})/SQRT(({2}^2+{4}^2)/2)", "SQRT(1/{5}+{=1}^2/(2*{5}))*SQRT(2*(1-{6}))", "SQRT(({2}^2+{4}^2)/2)"}},
	{"design effect of cluster randomisation", "", []string{"1+({1}-1)*{2}"}},
	{"effective counts of a cluster trial", "", []string{"{1}/{5}", "{2}/{5}", "{3}/{5}", "{4}/{5}"}},
	{"effective number of people of a cluster trial", "", []string{"{1}/{2}"}},
	{"standard error adjusted for cluster randomisation", "", []string{"{1}*SQRT({2})"}},
	{"mean difference", "from means and standard deviations", []string{"{1}-{4}", "SQRT({2}^2/{3}+{5}^2/{6})"}},
	{"log ratio of means", "from means and standard deviations", []string{"LN({1}/{4})", "SQRT({2}^2/({3}*{1}^2)+{5}^2/({6}*{4}^2))"}},
	{"standardised mean difference", "from means and standard deviations", []string{
		"EXP(GAMMALN(({3}+{6}-2)/2)-GAMMALN(({3}+{6}-3)/2))/SQRT(({3}+{6}-2)/2)*({1}-{4})/SQRT((({3}-1)*{2}^2+({6}-1)*{5}^2)/({3}+{6}-2))",
		"SQRT(1/{3}+1/{6}+{=1}^2/(2*({3}+{6}-3.94)))",
		"SQRT((({3}-1)*{2}^2+({6}-1)*{5}^2)/({3}+{6}-2))",
		"EXP(GAMMALN(({3}+{6}-2)/2)-GAMMALN(({3}+{6}-3)/2))/SQRT(({3}+{6}-2)/2)"}},
	{"log odds ratio", "from a 2×2 table", []string{"LN({1}*({4}-{3})/(({2}-{1})*{3}))", "SQRT(1/{1}+1/({2}-{1})+1/{3}+1/({4}-{3}))"}},
	{"log risk ratio", "from a 2×2 table", []string{"LN({1}*{4}/({3}*{2}))", "SQRT(1/{1}-1/{2}+1/{3}-1/{4})"}},
	{"risk difference", "from a 2×2 table", []string{"{1}/{2}-{3}/{4}", "SQRT({1}*({2}-{1})/{2}^3+{3}*({4}-{3})/{4}^3)"}},
	{"arcsine difference", "from a 2×2 table", []string{"ASIN(SQRT({1}/{2}))-ASIN(SQRT({3}/{4}))", "SQRT(1/{2}+1/{4})/2"}},
	{"zero-cell correction treatment-arm, added to events and to non-events", "", []string{"{2}/({2}+{4})", "{4}/({2}+{4})"}},
	{"natural logarithm of the", "", []string{"LN({1})"}},
	{"Fisher's z of the", "", []string{"ATANH({1})"}},
	{"logit of the", "", []string{"LN({1}/(1-{1}))"}},
	{"arcsine of the square root of the", "", []string{"ASIN(SQRT({1}))"}},
	{"standard error from a t statistic", "", []string{"{1}/{2}"}},
	{"log rate ratio", "from events and person-time", []string{"LN({1}/{2}/({3}/{4}))", "SQRT(1/{1}+1/{3})"}},
	{"log rate", "from events and person-time", []string{"LN({1}/{2})", "1/SQRT({1})"}},
	{"logit proportion", "from events and total", []string{"LN({1}/({2}-{1}))", "SQRT(1/{1}+1/({2}-{1}))"}},
	{"arcsine proportion", "from events and total", []string{"ASIN(SQRT({1}/{2}))", "1/(2*SQRT({2}))"}},
	{"double arcsine proportion", "from events and total", []string{"(ASIN(SQRT({1}/({2}+1)))+ASIN(SQRT(({1}+1)/({2}+1))))/2", "1/SQRT(4*{2}+2)"}},
	{"Fisher's z and its standard error from a correlation", "", []string{"ATANH({1})", "1/SQRT({2}-3)"}},
	{"observed minus expected events and their variance", "", []string{
		"({1}*{4}-{3}*{2})/({2}+{4})", "{2}*{4}*({1}+{3})*({2}+{4}-{1}-{3})/(({2}+{4})^2*({2}+{4}-1))"}},
	{"", "from observed minus expected events", []string{"{1}/{2}", "1/SQRT({2})"}},
	{"variance of observed minus expected events from events and the numbers of people", "", []string{"{1}*{2}*{3}/({2}+{3})^2"}},
	{"variance of observed minus expected events from events and the shares", "", []string{"{1}*{2}*{3}"}},
	{"variance of observed minus expected events from events and the events", "", []string{"{1}*{2}/({1}+{2})"}},
	{"log hazard ratio and its standard error from z", "", []string{"{1}/SQRT({2})", "1/SQRT({2})"}},
	{"standard error from the variance of observed minus expected events", "", []string{"1/SQRT({1})"}},
	{"standard deviation from the standard error of a difference in means", "", []string{"{1}/SQRT(1/{2}+1/{3})"}},
	{"difference of two means", "", []string{"{1}-{2}"}},
	{"standardised mean difference from a log odds ratio", "", []string{"{1}*SQRT(3)/PI()", "{2}*SQRT(3)/PI()"}},
	{"log odds ratio from a standardised mean difference", "", []string{"{1}*PI()/SQRT(3)", "{2}*PI()/SQRT(3)"}},
	{"z from a two-sided p-value, direction higher", "", []string{"-NORMSINV({1}/2)"}},
	{"z from a two-sided p-value, direction lower", "", []string{"NORMSINV({1}/2)"}},
	{"z from a one-sided p-value, tested for higher", "", []string{"-NORMSINV({1})"}},
	{"z from a one-sided p-value, tested for lower", "", []string{"NORMSINV({1})"}},
	{"mean and standard deviation from a median with quartiles,", "", []string{
		"{2}+(0.7+0.39/{4})*(({1}+{3})/2-{2})", "({3}-{1})/(2*NORMSINV((0.75*{4}-0.125)/({4}+0.25)))", "ABS({1}+{3}-2*{2})/({3}-{1})"}},
	{"mean and standard deviation from a median with a range", "", []string{
		"{2}+4/(4+{4}^0.75)*(({1}+{3})/2-{2})", "({3}-{1})/(2*NORMSINV(({4}-0.375)/({4}+0.25)))", "ABS({1}+{3}-2*{2})/({3}-{1})"}},
	{"mean and standard deviation from a median with quartiles and", "", []string{
		"{3}+2.2/(2.2+{6}^0.75)*(({1}+{5})/2-{3})+(0.7-0.72/{6}^0.55)*(({2}+{4})/2-{3})",
		"(({5}-{1})/(2*NORMSINV(({6}-0.375)/({6}+0.25)))+({4}-{2})/(2*NORMSINV((0.75*{6}-0.125)/({6}+0.25))))/2", "ABS({2}+{4}-2*{3})/({4}-{2})"}},
}

// formulasOf returns the formulas of a conversion, nil where it has none.
func formulasOf(m effect.Measure, c effect.Conversion) []string {
	switch {
	case strings.HasPrefix(c.What, "standard error from a two-sided p-value"):
		t := "TINV({2},{3})"
		if math.IsInf(c.From[2].Value, 1) {
			t = "-NORMSINV({2}/2)"
		}
		return []string{t, "ABS({1})/({=1})"}
	case strings.HasPrefix(c.What, "standard error from a") && strings.Contains(c.What, "interval"):
		return intervalFormula(m, c)
	}
	for _, f := range stepFormulas {
		if strings.HasPrefix(c.What, f.what) && strings.HasSuffix(c.What, f.ends) {
			return f.formulas
		}
	}
	return nil
}

// intervalFormula is the standard error from limits.
func intervalFormula(m effect.Measure, c effect.Conversion) []string {
	twice := "(-2*NORMSINV((1-{3})/2))"
	if strings.Contains(c.What, "Student's t") {
		twice = "(2*TINV(1-{3},{4}))"
	}
	width := "({2}-{1})"
	switch {
	case strings.Contains(c.What, "on the log scale"):
		width = "LN({2}/{1})"
	case strings.Contains(c.What, "on the analysis scale"):
		width = "(" + toAnalysis(m, "{2}") + "-" + toAnalysis(m, "{1}") + ")"
	}
	return []string{width + "/" + twice}
}
