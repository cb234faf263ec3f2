package ingest

import (
	"fmt"
	"math"

	"steelyard/meta/review"
)

// checkNumbers reports numbers that cannot be right, whatever they are used for.
func (r *rowReader) checkNumbers() {
	r.checkArm(review.EventsTreated, review.TotalTreated)
	r.checkArm(review.EventsControl, review.TotalControl)
	r.checkArm(review.Events, review.Total)
	r.checkKinds()
	for _, field := range []review.Field{review.SDTreated, review.SDControl, review.BaselineSDTreated, review.BaselineSDControl, review.SDDifference} {
		if sd, ok := r.values.has(field); ok && !(sd > 0) {
			message := "a standard deviation of 0 says that nobody differed; check whether it was reported, and leave it blank if not"
			if sd < 0 {
				message = "a standard deviation cannot be below 0, as " + shortest(sd) + " is; check the sign and the column, and leave it blank if it was not reported"
			}
			r.wrong("M6", field, message)
		}
	}
	for _, field := range []review.Field{review.StandardError, review.SETreated, review.SEControl} {
		if se, ok := r.values.has(field); ok && !(se > 0) {
			message := "a standard error of 0 would give the study endless weight; it must be above 0, so check the source"
			if se < 0 {
				message = "a standard error cannot be below 0, as " + shortest(se) + " is; check the sign and the column"
			}
			r.wrong("M6", field, message)
		}
	}
	if p, ok := r.values.has(review.PValue); ok && !(0 <= p && p <= 1) {
		r.wrong("I8", review.PValue, "a p-value lies between 0 and 1, not at "+shortest(p)+"; check the column and the decimal mark")
	}
	r.checkLevel()
	r.checkLimits(review.Estimate, review.LimitLow, review.LimitHigh)
	r.checkLimits(review.AnalysisEstimate, review.AnalysisLow, review.AnalysisHigh)
	r.checkRatio()
}

// checkKinds checks the numbers of the rarer kinds for what none of them can be.
func (r *rowReader) checkKinds() {
	for _, field := range []review.Field{review.PersonTimeTreated, review.PersonTimeControl, review.PersonTime} {
		if time, ok := r.values.has(field); ok && !(time > 0) {
			r.wrong("C1", field, "a person time of "+shortest(time)+" cannot be; write how long all people were followed, added up")
		}
	}
	for _, field := range []review.Field{review.WithinCorrelation, review.Coefficient} {
		if x, ok := r.values.has(field); ok && !(-1 <= x && x <= 1) {
			r.wrong("I4", field, "a correlation lies between -1 and 1, not at "+shortest(x)+"; check the column and the decimal mark")
		}
	}
	if x, ok := r.values.has(review.ICC); ok && !(0 <= x && x <= 1) {
		r.wrong("D7", review.ICC, "an intracluster correlation lies between 0 and 1, not at "+shortest(x)+"; write it such as 0.05")
	}
	if sides, ok := r.values.has(review.PSides); ok && sides != 1 && sides != 2 {
		r.wrong("I9", review.PSides, "a p-value has 1 or 2 sides, not "+shortest(sides))
	}
}

// wrong records an error of a number that nothing can be made of: no acceptance
// helps.
func (r *rowReader) wrong(rule string, field review.Field, message string) {
	r.t.final[len(r.t.x.Findings)] = true
	r.blame(rule, field, message)
}

// doubt records an error of a number that can be used if the reviewer vouches for
// it.
func (r *rowReader) doubt(rule string, field review.Field, message string) {
	r.blame(rule, field, message+howToAccept(rule))
}

func (r *rowReader) blame(rule string, field review.Field, message string) {
	n := r.values.at[field]
	r.t.find(review.Error, rule, n.Place.In(r.study.Row), r.study.Name, message)
}

// checkArm checks the count and the size of an arm. A total of an arm with means
// may not be broken either.
func (r *rowReader) checkArm(eventsField, totalField review.Field) {
	events, counted := r.values.has(eventsField)
	total, sized := r.values.has(totalField)
	switch {
	case !sized:
	case !(total > 0):
		r.wrong("C1", totalField, "an arm of "+shortest(total)+" people cannot be; write how many were analysed")
	case total != math.Trunc(total):
		r.broken(totalField, shortest(total)+" is no whole number of people; write the number analysed")
	}
	switch {
	case !counted:
	case events < 0:
		r.wrong("C1", eventsField, "a count of "+shortest(events)+" cannot be; write how many people had the event")
	case events != math.Trunc(events):
		r.broken(eventsField, shortest(events)+" is no whole number of people; write the count, not a percentage or a corrected count")
	case sized && total > 0 && events > total:
		message := fmt.Sprintf("%s among %s cannot be; check both numbers, and that people are counted and not events", plural(events, "event", "events"), plural(total, "person", "people"))
		if r.hasPersonTime() {
			r.doubt("C1", eventsField, message)
		} else {
			r.wrong("C1", eventsField, message)
		}
	}
}

// broken records a count that is no whole number. As an effective count, corrected
// by the reviewer, it serves in a table of two arms or beside means, but not as the
// events of one arm or of a time.
func (r *rowReader) broken(field review.Field, message string) {
	_, oneArm := r.values.has(review.Events)
	if r.hasPersonTime() || (oneArm && (field == review.Events || field == review.Total)) {
		r.wrong("C2", field, message)
		return
	}
	r.doubt("C2", field, message)
}

// hasPersonTime reports whether the row gives how long people were followed, so
// that its events are no people.
func (r *rowReader) hasPersonTime() bool {
	for _, field := range []review.Field{review.PersonTimeTreated, review.PersonTimeControl, review.PersonTime} {
		if _, ok := r.values.has(field); ok {
			return true
		}
	}
	return false
}

// checkLevel checks the level of an interval.
func (r *rowReader) checkLevel() {
	level, ok := r.values.has(review.LimitLevel)
	if !ok || (0 < level && level < 1) {
		return
	}
	message := "the level of an interval is a fraction between 0 and 1, not " + shortest(level) + "; 95% is written 0.95"
	if 1 < level && level < 100 {
		message = fmt.Sprintf("the level of an interval is a fraction; %s%% is written %s", shortest(level), shortest(level/100))
	}
	r.wrong("I6", review.LimitLevel, message)
}

// checkLimits checks the order of an estimate and its limits.
func (r *rowReader) checkLimits(estimateField, lowField, highField review.Field) {
	low, hasLow := r.values.has(lowField)
	high, hasHigh := r.values.has(highField)
	estimate, hasEstimate := r.values.has(estimateField)
	switch {
	case hasLow && hasHigh && low == high:
		r.wrong("I1", lowField, fmt.Sprintf("both limits are %s, which would make the estimate certain; check them against the source", shortest(low)))
	case hasLow && hasHigh && low > high:
		r.wrong("I1", lowField, fmt.Sprintf("the lower limit %s is not below the upper limit %s; are they swapped?", shortest(low), shortest(high)))
	case hasEstimate && hasLow && estimate < low, hasEstimate && hasHigh && estimate > high:
		r.wrong("I1", estimateField, fmt.Sprintf("the estimate %s lies outside its limits; check all three numbers against the source", shortest(estimate)))
	}
}

// checkRatio checks that a ratio and its limits are positive.
func (r *rowReader) checkRatio() {
	if !r.study.Measure.Log() {
		return
	}
	for _, field := range []review.Field{review.Estimate, review.LimitLow, review.LimitHigh} {
		if x, ok := r.values.has(field); ok && !(x > 0) {
			r.wrong("I4", field, fmt.Sprintf("%s cannot be %s, since it is above 0; if that is a logarithm, head the column \"log %s\"",
				r.study.Measure.WithArticle(), shortest(x), r.study.Measure))
		}
	}
}

// checkRow reports rows that are no study, or not one to be read as it stands.
func (r *rowReader) checkRow() {
	t := r.t
	if len(r.study.Numbers) == 0 && !r.unreadable {
		message := "the row has no number, so there is nothing to pool; fill its numbers in, or take the row out of the table"
		if filled(r.row) == 1 {
			message = "the row has a name and nothing else; if it is a heading, write it into a column such as subgroup beside each study, else fill its numbers in"
		}
		r.find(review.Error, "F9", 0, message)
	}
	if namesTotal(r.study.Name) {
		r.find(review.Error, "F10", t.role.name, "the row looks like a total of other rows; pooling it would count their people twice, so take it out of the table"+howToAccept("F10"))
	}
	if r.row.Hidden {
		r.find(review.Warning, "F9", 0, "the row is hidden and was read; show it, or delete it if it is not meant to count")
	}
	if extra := len(r.row.Cells); t.book.Text && extra > len(t.header.columns) {
		r.find(review.Error, "F9", extra, fmt.Sprintf("the row has %d cells and the header %d, so its numbers may stand in the wrong columns; put a text that holds the delimiter into double quotes"+howToAccept("F9"), extra, len(t.header.columns)))
	}
}
