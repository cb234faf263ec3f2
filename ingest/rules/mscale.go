package rules

import (
	"fmt"
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// leastAlike is how many studies measured alike it takes to judge one by the others.
const leastAlike = 4

// alike parts the rows of an outcome by what makes their numbers comparable: the
// unit, the ends of the scale, and whether they are changes. Where differences are
// standardised because scales differ, only rows that state their unit are compared.
func alike(rows []*row) [][]*row {
	at := map[string]int{}
	var groups [][]*row
	for _, r := range rows {
		unit := r.remark(review.Unit)
		if unit == "" && r.measure == effect.StandardisedMeanDifference && !r.has(review.ScaleLow, review.ScaleHigh) {
			continue
		}
		key := textKey(unit, shown(r.value(review.ScaleLow)), shown(r.value(review.ScaleHigh)), r.remark(review.ResultType))
		i, known := at[key]
		if !known {
			i = len(groups)
			at[key] = i
			groups = append(groups, nil)
		}
		groups[i] = append(groups[i], r)
	}
	return groups
}

// acrossScale compares the SDs and means of studies measured alike: rules M2, M3, M9
// and M12.
func (c *checker) acrossScale(rows []*row) {
	for _, group := range alike(rows) {
		c.deviations(group)
		c.units(group)
	}
}

// deviations compares SDs: M2, M3 and M9.
func (c *checker) deviations(rows []*row) {
	var logs []float64
	for _, r := range rows {
		if sd, ok := r.spread(); ok {
			logs = append(logs, math.Log(sd))
		}
	}
	usual := scaleOf(logs)
	for _, r := range rows {
		if treated, control, ok := r.groups(); ok && len(logs) >= leastAlike {
			c.deviation(r, pooledSD(treated, control), 2/(1/treated.N+1/control.N), usual, len(logs))
		}
		c.rangeAsDeviation(r)
		if len(logs) >= leastAlike {
			c.deviationForError(r, math.Exp(usual.center))
		}
	}
}

// deviation compares a row's SD with the median of all: a standard error in its
// place (M2), or a range between quartiles (M9).
func (c *checker) deviation(r *row, sd, n float64, usual scale, k int) {
	const apart, within, quartiles, clear, enough, closest = 3.0, 1.5, 1.35, 3.5, 8, 0.07
	center := math.Exp(usual.center)
	ratio := sd / center
	switch asError := sd * math.Sqrt(n) / center; {
	case ratio < 1/apart && 1/within <= asError && asError <= within:
		c.add(r, review.Warning, "M2", review.SDTreated, fmt.Sprintf("the SDs are about %s where the other studies have a median of %s; times the root of the number of people they would be %s: are they standard errors?", shown(sd), shown(center), shown(sd*math.Sqrt(n))), r.asErrors()...)
	case k >= enough && near(ratio, quartiles, 0.1) && math.Log(ratio) > clear*math.Max(usual.seen, closest):
		c.add(r, review.Warning, "M9", review.SDTreated, fmt.Sprintf("the SDs are about %s, which is %.2f times the median of the other studies (%s); a range between quartiles is about 1.35 SDs: was that entered?", shown(sd), ratio, shown(center)))
	}
}

// rangeAsDeviation reports an SD that is nearly as wide as its scale (M9).
func (c *checker) rangeAsDeviation(r *row) {
	const share = 0.8
	if !r.has(review.ScaleLow, review.ScaleHigh) || r.changes() {
		return
	}
	width := r.value(review.ScaleHigh) - r.value(review.ScaleLow)
	for _, a := range arms {
		if sd, ok := r.number(a.sd); ok && width > 0 && sd.Value > share*width {
			c.add(r, review.Warning, "M9", a.sd, fmt.Sprintf("an SD of %s is wide for a scale of %s in all; is it a range?", typed(sd), shown(width)))
			return
		}
	}
}

// deviationForError reports an SD in the column of a standard error (M3): times the
// root of n it is more than three times the median SD, and itself near that. Its
// reading takes every such arm of the row as an SD, since both come from one report.
func (c *checker) deviationForError(r *row, center float64) {
	const times, within = 3, 1.5
	var message string
	var fields []review.Field
	var values []fieldValue
	for _, a := range arms {
		se, ok := r.number(a.se)
		n := r.value(a.total)
		if !ok || n < 2 || se.Value*math.Sqrt(n) <= times*center || se.Value > within*center || se.Value < center/within {
			continue
		}
		if message == "" {
			message = fmt.Sprintf("a standard error of %s would mean an SD of %s, where the other studies have a median of %s; is it the SD?", typed(se), shown(se.Value*math.Sqrt(n)), shown(center))
		}
		fields = append(fields, a.se)
		values = append(values, fieldValue{a.se, se.Value / math.Sqrt(n)})
	}
	if len(fields) > 0 {
		c.add(r, review.Warning, "M3", fields[0], message, r.asEntered(fields...), r.with("as the SD", values...))
	}
}

// factors are what numbers in one unit are multiplied by to be in another.
var factors = []struct {
	by   float64
	what string
}{
	{10, "a decimal place or centimetres and millimetres"}, {100, "per cent, or centimetres and metres"}, {1000, "thousandths, such as grams and milligrams"},
	{12, "months and years"}, {7, "days and weeks"}, {30.4, "days and months"}, {60, "minutes and hours"}, {2.54, "inches and centimetres"}, {0.4536, "pounds and kilograms"},
	{18.02, "glucose in mmol/L and mg/dL"}, {38.67, "cholesterol in mmol/L and mg/dL"}, {88.4, "creatinine in mg/dL and µmol/L"}, {88.57, "triglycerides in mmol/L and mg/dL"},
}

// units reports means that differ from those of the other studies by the factor
// between two units (M12): in both arms, within 3 per cent, far outside how the
// others scatter, and in the SDs too.
func (c *checker) units(rows []*row) {
	const within, clear, sdWithin = 0.03, 3.5, 1.6
	var logs, deviations []float64
	for _, r := range rows {
		if a, b, ok := r.groups(); ok && a.Mean > 0 && b.Mean > 0 {
			logs = append(logs, math.Log((a.Mean+b.Mean)/2))
			deviations = append(deviations, math.Log(pooledSD(a, b)))
		}
	}
	if len(logs) < leastAlike {
		return
	}
	usual, center := scaleOf(logs), math.Exp(median(logs))
	for _, r := range rows {
		a, b, ok := r.groups()
		if !ok || !(a.Mean > 0 && b.Mean > 0) || math.Abs(usual.z(math.Log((a.Mean+b.Mean)/2))) <= clear {
			continue
		}
		ratio, sdRatio := (a.Mean+b.Mean)/2/center, pooledSD(a, b)/math.Exp(median(deviations))
		for _, f := range factors {
			by := f.by
			if math.Abs(math.Log(ratio)-math.Log(by)) > math.Abs(math.Log(ratio)+math.Log(by)) {
				by = 1 / by
			}
			tolerance := within + perSpread(usual)
			if math.Abs(math.Log(ratio/by)) > tolerance || sdRatio/by > sdWithin || sdRatio/by < 1/sdWithin {
				continue
			}
			c.add(r, review.Warning, "M12", review.MeanTreated, fmt.Sprintf("the means, %s and %s, are about %s times the median of the other studies (%s), which is the factor between %s; check the unit", shown(a.Mean), shown(b.Mean), shown(ratio), shown(center), f.what),
				r.asEntered(review.MeanTreated, review.SDTreated, review.MeanControl, review.SDControl),
				r.with("in the unit of the others", fieldValue{review.MeanTreated, a.Mean / by}, fieldValue{review.SDTreated, a.SD / by}, fieldValue{review.MeanControl, b.Mean / by}, fieldValue{review.SDControl, b.SD / by}))
			break
		}
	}
}

// perSpread is how far the means of studies in one unit scatter, which the factor of
// a unit cannot be told more closely than.
func perSpread(s scale) float64 { return math.Min(s.sd, 0.15) }

// copiedDeviations reports SDs that are the same in both arms of several studies
// (M6), which a pooled SD copied into both would explain.
func (c *checker) copiedDeviations(rows []*row) {
	const least = 3
	var same []*row
	for _, r := range rows {
		if r.has(review.SDTreated, review.SDControl) && r.value(review.SDTreated) == r.value(review.SDControl) && significant(r.value(review.SDTreated)) {
			same = append(same, r)
		}
	}
	if len(same) < least {
		return
	}
	for _, r := range same {
		c.add(r, review.Warning, "M6", review.SDTreated, fmt.Sprintf("both arms have the SD %s, as in %d studies of this outcome; was an SD of both arms together copied into each?", shown(r.value(review.SDTreated)), len(same)))
	}
}

// significant reports whether a number has three significant digits or more.
func significant(x float64) bool {
	if x == 0 {
		return false
	}
	scaled := math.Abs(x) / math.Pow10(int(math.Floor(math.Log10(math.Abs(x)))))
	return math.Abs(scaled*10-math.Round(scaled*10)) > 1e-6 || math.Abs(x) >= 100
}

// directions reports rows in which the other direction is better than in most rows
// of their outcome (M13).
func (c *checker) directions(rows []*row) {
	var count [3]int
	for _, r := range rows {
		count[r.Better]++
	}
	lower, higher := count[review.BetterLower], count[review.BetterHigher]
	if lower == 0 || higher == 0 {
		return
	}
	odd, word := review.BetterLower, "lower"
	if higher < lower {
		odd, word = review.BetterHigher, "higher"
	}
	for _, r := range rows {
		if r.Better == odd {
			c.add(r, review.Warning, "M13", review.BetterField, fmt.Sprintf("%s is better in this row, while the other direction is in %d rows of the outcome; multiply the row's means or estimate by -1 and say so in a note, or mend the direction", word, max(lower, higher)))
		}
	}
}
