package workbook

// trial is an invented trial.
type trial struct {
	name, date, riskOfBias, setting string
	flare, harm                     counts
	ratio                           limits // instead of the events of flare, where only this is reported
	symptom                         means  // zero where not measured
	page                            int    // of the invented report
}

// counts are events and people of both arms; events below 0 are not reported.
type counts struct{ events1, total1, events2, total2 int }

// means are people, mean and standard deviation of both arms.
type means struct {
	total1     int
	mean1, sd1 float64
	total2     int
	mean2, sd2 float64
}

// limits are an estimate with its 95% limits.
type limits struct{ estimate, low, high float64 }

// Names of the outcomes.
const (
	flare   = "flare within 24 weeks"
	symptom = "symptom score at 24 weeks"
	harm    = "serious harm"
)

// trials are nine trials over sixteen years, all made up.
var trials = []trial{
	{name: "Halvorsen 2009", date: "2009-03", riskOfBias: "high", setting: "tube", page: 214,
		flare: counts{11, 41, 19, 40}, harm: counts{1, 41, 0, 40}, symptom: means{38, 14.2, 6.1, 37, 17.5, 6.6}},
	{name: "Zielińska 2011", date: "2011-01", riskOfBias: "low", setting: "tube", page: 88,
		flare: counts{20, 75, 27, 74}, harm: counts{2, 75, 1, 74}, symptom: means{71, 15.1, 6.8, 70, 16.6, 7.1}},
	{name: "Okwuosa 2012", date: "2012-05", riskOfBias: "some concerns", setting: "mask", page: 31,
		flare: counts{2, 17, 7, 18}, harm: counts{0, 17, 0, 18}},
	{name: "Brandão 2014", date: "2014-02", riskOfBias: "low", setting: "tube", page: 602,
		flare: counts{30, 98, 41, 101}, harm: counts{3, 98, 2, 101}, symptom: means{92, 13.8, 6.4, 95, 15.9, 6.7}},
	{name: "Marchetti-Ruiz 2015", date: "2015-09", riskOfBias: "some concerns", setting: "mask", page: 1177,
		flare: counts{44, 121, 38, 118}, harm: counts{2, 121, 3, 118}, symptom: means{115, 16.0, 7.0, 110, 16.3, 6.9}},
	{name: "Lindqvist 2017", date: "2017-10", riskOfBias: "low", setting: "tube", page: 45,
		flare: counts{36, 158, 66, 160}, harm: counts{4, 158, 2, 160}, symptom: means{150, 12.9, 6.2, 151, 15.4, 6.5}},
	{name: "Abernethy 2019", date: "2019-06", riskOfBias: "low", setting: "tube", page: 310,
		flare: counts{23, 88, 35, 90}, harm: counts{1, 88, 0, 90}, symptom: means{83, 14.6, 6.9, 84, 16.5, 7.2}},
	{name: "Dvořák 2021", date: "2021-04", riskOfBias: "some concerns", setting: "tube", page: 57,
		flare: counts{-1, 131, -1, 128}, ratio: limits{0.71, 0.49, 1.02}, harm: counts{2, 131, 2, 128}},
	{name: "Obradović 2024", date: "2024-08", riskOfBias: "low", setting: "tube", page: 923,
		flare: counts{50, 206, 74, 207}, harm: counts{5, 206, 3, 207}, symptom: means{195, 13.7, 6.3, 197, 15.2, 6.6}},
}

// agreed is when the invented panel agreed on its thresholds: after the last trial was
// published, before the first judgement.
const agreed = "2024-09-16"

// planRows are the settings of the invented review: setting, value, outcome, reason and
// date.
var planRows = [][]any{
	{"measure", "risk ratio", flare, "agreed before the first look at the data"},
	{"better", "lower", flare, "a flare is unwanted"},
	{"important", 0.87, flare, "40 fewer flares per 1000 people where 300 per 1000 would have one", agreed},
	{"baseline", "low 0.15, medium 0.3, high 0.45", flare, "risks of a flare in three invented registers of Vane syndrome"},
	{"prior", 0.2, flare, "one in five treatments tried in Vane syndrome before turned out to help"},
	{"run", "low risk of bias: risk of bias is low", flare, "the panel trusts these trials most"},
	{"run", "no high risk of bias: risk of bias is not high", flare, ""},
	{"measure", "mean difference", symptom, "all trials used the same scale, 0 to 40"},
	{"better", "lower", symptom, "fewer symptoms"},
	{"important", 1.5, symptom, "the smallest change that people with Vane syndrome notice", agreed},
	{"prior", 0.2, symptom, "as for flares"},
	{"measure", "odds ratio", harm, "harm is rare, so odds and risks nearly agree"},
	{"better", "lower", harm, "harm is unwanted"},
	{"run", "common effect: effects = common", "", "to show what the model adds"},
}

// Persons of the invented panel.
const (
	rater  = "I. Thornquist (invented)"
	second = "P. Okonjo-Vance (invented)"
	panel  = "the invented panel"
)

// judgementRows are what the invented panel judged: outcome, domain, rating, reason, by
// and date.
var judgementRows = [][]any{
	{flare, "start", "high", "all nine are randomised trials", rater, "2024-10-07"},
	{flare, "risk of bias", "no change", "the answer holds without the one trial at high risk", rater, "2024-10-07"},
	{flare, "inconsistency", "no change", "eight of nine point the same way; the odd one used the mask", second, "2024-10-07"},
	{flare, "indirectness", "no change", "people, dose and follow-up are those of the question", second, "2024-10-07"},
	{flare, "imprecision", "down one", "the interval ends close to the threshold, and too few people were studied at low and medium risk", panel, "2024-10-21"},
	{flare, "publication bias", "no change", "every registered trial has reported", rater, "2024-10-07"},
	{flare, "certainty", "moderate", "one step down for imprecision", panel, "2024-10-21"},
	{symptom, "start", "high", "all seven are randomised trials", rater, "2024-10-07"},
	{symptom, "risk of bias", "no change", "the trial at high risk has little weight", rater, "2024-10-07"},
	{symptom, "inconsistency", "no change", "every trial points the same way", second, "2024-10-07"},
	{symptom, "indirectness", "no change", "one scale, and the one that people with the condition chose", second, "2024-10-07"},
	{symptom, "imprecision", "down one", "the interval holds the threshold", panel, "2024-10-21"},
	{symptom, "publication bias", "no change", "two trials did not measure the score, and said so beforehand", rater, "2024-10-07"},
	{symptom, "certainty", "moderate", "one step down for imprecision", panel, "2024-10-21"},
	{harm, "start", "high", "all nine are randomised trials", rater, "2024-10-07"},
	{harm, "risk of bias", "no change", "harms were asked for in the same way in both arms", rater, "2024-10-07"},
	{harm, "inconsistency", "no change", "the intervals overlap throughout", second, "2024-10-07"},
	{harm, "indirectness", "no change", "people, dose and follow-up are those of the question", second, "2024-10-07"},
	{harm, "imprecision", "down two", "33 events in all: the interval holds fewer harms and three times as many", panel, "2024-10-21"},
	{harm, "publication bias", "no change", "every registered trial has reported", rater, "2024-10-07"},
	{harm, "certainty", "low", "two steps down for imprecision", panel, "2024-10-21"},
}

// guideRows explain the workbook.
var guideRows = [][]any{
	{"Invented data", notice},
	{"What to do", "Run: steelyard pool demo.xlsx"},
	{"", ""},
	{"Sheet or column", "Meaning"},
	{"trials", "one row for each trial and outcome; the rows above the header are titles"},
	{"Study, Date", "name of the trial and when it was published, as year and month"},
	{"Outcome", "rows with the same outcome are pooled together"},
	{"Brindle, Without", "the two arms: treated with brindle extract, and without it (control)"},
	{"Events, Total", "how many people had the event, and how many were analysed"},
	{"Mean, SD", "of the symptom score from 0 (none) to 40 (worst): mean and standard deviation at 24 weeks"},
	{"Risk ratio", "estimate and 95% limits, for a trial that reports no counts"},
	{"Risk of bias", "as the invented reviewers judged it: low, some concerns, high"},
	{"Setting", "how the extract was given: by tube or by mask"},
	{"Source, Note", "where the numbers stand in the invented report, and remarks"},
	{"plan", "the settings of the analysis with their reasons; a blank outcome means all outcomes"},
	{"date (in plan)", "when a threshold was agreed; it should stand before the results were seen"},
	{"judgement", "what the invented panel judged of each outcome: its own ratings and reasons, by whom and when"},
	{"run (in plan)", "a planned sensitivity analysis: a name, then a filter or changed settings"},
}
