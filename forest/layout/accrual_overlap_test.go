package layout

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"steelyard/meta/review"
)

// accrualStyles are the styles in which the charts of accrual are checked.
var accrualStyles = []Style{{}, {Width: NarrowWidth}, {Width: 400, NoTitle: true}, {Width: NarrowWidth, TypeSize: 8.3}, {TypeSize: 9}}

// difficultPoints are cumulative charts that strain the layout.
func difficultPoints() map[string]CumulativeInput {
	all := map[string]CumulativeInput{}
	variant := func(name string, k int, change func(*CumulativeInput)) {
		in := manyPoints(k)
		change(&in)
		all[name] = in
	}
	variant("ties", 13, func(in *CumulativeInput) {
		k := 0
		for i := range in.Points {
			p := &in.Points[i]
			for j := range i % 6 {
				p.Entered = append(p.Entered, Arrival{inventedNames[j], "2001"})
			}
			k += len(p.Entered)
			p.K = k
		}
	})
	variant("none", 9, func(in *CumulativeInput) {
		for i := range in.Points {
			in.Points[i].LnEvidence = -mostForNone
		}
	})
	variant("heavy for none", 9, func(in *CumulativeInput) {
		for i := range in.Points {
			in.Points[i].LnEvidence = -float64(i) * 1.5
		}
	})
	variant("massive", 12, func(in *CumulativeInput) {
		for i := range in.Points {
			in.Points[i].LnEvidence = math.Pow(6, float64(i)) - 3
		}
	})
	variant("linear", 12, func(in *CumulativeInput) {
		in.Scale, in.Prior, in.Sides = EffectScale{Measure: "standardised mean difference", Decimals: 2}, 0, Sides{}
	})
	variant("undated", 40, func(in *CumulativeInput) {
		in.Points[7].Date = review.Date{}
	})
	variant("some undated", 12, func(in *CumulativeInput) {
		for i := 9; i < 12; i++ {
			in.Points[i].Date = review.Date{}
		}
	})
	variant("one dated", 3, func(in *CumulativeInput) {
		in.Points[1].Date, in.Points[2].Date = review.Date{}, review.Date{}
	})
	variant("ordered", 12, func(in *CumulativeInput) {
		in.Order = "in order of risk of bias, low before high, and within it in the order of the sheet that was read"
		for i := range in.Points {
			in.Points[i].Label = strings.Repeat("high ", i)
		}
	})
	variant("one day", 6, func(in *CumulativeInput) {
		for i := range in.Points {
			in.Points[i].Date = review.Date{Year: 2020, Month: 2, Day: 29}
		}
	})
	variant("one month", 6, func(in *CumulativeInput) {
		for i := range in.Points {
			in.Points[i].Date = review.Date{Year: 2020, Month: 2, Day: 3 + 4*i}
		}
	})
	variant("years only", 12, func(in *CumulativeInput) {
		for i := range in.Points {
			in.Points[i].Date = review.Date{Year: 2001 + i/2}
		}
	})
	variant("centuries", 5, func(in *CumulativeInput) {
		for i := range in.Points {
			in.Points[i].Date = review.Date{Year: 1 + 2400*i}
		}
	})
	variant("texts", 12, func(in *CumulativeInput) {
		in.Title, in.Scale.Measure = strings.Repeat("A very long title ", 12), strings.Repeat("ratio of means of something ", 6)
		in.Sides = Sides{Lower: "fewer flares of Vane syndrome", Higher: "more flares of Vane syndrome"}
		for i := range in.Points {
			in.Points[i].Entered[0].Name = strings.Repeat("Unbroken", 10)
		}
	})
	variant("flat", 4, func(in *CumulativeInput) {
		for i := range in.Points {
			p := &in.Points[i]
			p.Estimate, p.Low, p.High, p.LnEvidence = 0, 0, 0, 0
		}
	})
	variant("far", 4, func(in *CumulativeInput) {
		for i := range in.Points {
			p := &in.Points[i]
			p.Estimate, p.Low, p.High = 13, -600, 600
		}
	})
	variant("prior", 9, func(in *CumulativeInput) { in.Prior = 0.0001 })
	variant("certain prior", 9, func(in *CumulativeInput) { in.Prior = 0.9999 })
	return all
}

// TestCumulativeNothingOverlaps lays out charts of 1 to 200 points in all styles.
func TestCumulativeNothingOverlaps(t *testing.T) {
	for k := 1; k <= 200; k++ {
		if k > 45 && k%31 != 0 && k != 120 && k != 200 {
			continue
		}
		for _, style := range accrualStyles {
			page := mustCumulative(t, manyPoints(k), style)
			checkPage(t, fmt.Sprintf("%d points, style %+v", k, style), page)
			if style.TypeSize == 0 && page.Height > maxPageHeight {
				t.Errorf("%d points: page of %.0f pt, at most %.0f (230 mm)", k, page.Height, maxPageHeight)
			}
		}
	}
	for name, in := range difficultPoints() {
		for _, style := range accrualStyles {
			checkPage(t, fmt.Sprintf("%s, style %+v", name, style), mustCumulative(t, in, style))
		}
	}
}

// difficultOmissions are leave-one-out charts that strain the layout.
func difficultOmissions() map[string]LeaveOneOutInput {
	all := map[string]LeaveOneOutInput{}
	variant := func(name string, k int, change func(*LeaveOneOutInput)) {
		in := manyOmissions(k)
		change(&in)
		all[name] = in
	}
	variant("none", 9, func(in *LeaveOneOutInput) {
		in.All.LnEvidence = -0.5
		for i := range in.Rows {
			in.Rows[i].LnEvidence = -0.1 * float64(i)
		}
	})
	variant("massive", 9, func(in *LeaveOneOutInput) {
		in.All.LnEvidence = 1e6
		for i := range in.Rows {
			in.Rows[i].LnEvidence = math.Pow(10, float64(i)) - 20
		}
	})
	variant("against", 9, func(in *LeaveOneOutInput) {
		in.All.LnEvidence = -30
		for i := range in.Rows {
			in.Rows[i].LnEvidence = -30 + 4*float64(i)
		}
	})
	variant("linear", 9, func(in *LeaveOneOutInput) {
		in.Scale, in.Sides = EffectScale{Measure: "standardised mean difference", Decimals: 3}, Sides{}
	})
	variant("common", 9, func(in *LeaveOneOutInput) {
		in.All.Tau = -1
		for i := range in.Rows {
			in.Rows[i].Tau = -1
		}
	})
	variant("problems", 9, func(in *LeaveOneOutInput) {
		in.Rows[2].Problem = "the likelihood of the spread has no maximum that any of the methods could find in the time that they had"
		in.Rows[5].Problem = "none"
	})
	variant("texts", 30, func(in *LeaveOneOutInput) {
		in.Title, in.Scale.Measure = strings.Repeat("A very long title ", 12), strings.Repeat("ratio of means of something ", 6)
		in.Sides = Sides{Lower: strings.Repeat("fewer flares of Vane syndrome ", 5), Higher: "more flares of Vane syndrome"}
		for i := range in.Rows {
			in.Rows[i].Name = strings.Repeat("Unbroken", 10)
		}
	})
	variant("flat", 3, func(in *LeaveOneOutInput) {
		in.All = Omission{}
		for i := range in.Rows {
			in.Rows[i] = Omission{}
		}
	})
	variant("far", 4, func(in *LeaveOneOutInput) {
		for i := range in.Rows {
			o := &in.Rows[i]
			o.Estimate, o.Low, o.High, o.Tau = 13, -600, 600, 123456
		}
	})
	return all
}

// TestLeaveOneOutNothingOverlaps lays out charts of 2 to 120 rows in all styles.
func TestLeaveOneOutNothingOverlaps(t *testing.T) {
	check := func(name string, in LeaveOneOutInput) {
		for _, style := range accrualStyles {
			for i, page := range mustLeaveOneOut(t, in, style).Pages {
				checkPage(t, fmt.Sprintf("%s, style %+v, page %d", name, style, i+1), page)
				if page.Height > maxPageHeight {
					t.Errorf("%s, style %+v: page of %.0f pt, at most %.0f (230 mm)", name, style, page.Height, maxPageHeight)
				}
			}
		}
	}
	for k := 2; k <= 120; k++ {
		if k < 52 || k%17 == 0 || k == 120 {
			check(fmt.Sprintf("%d rows", k), manyOmissions(k))
		}
	}
	for name, in := range difficultOmissions() {
		check(name, in)
	}
}
