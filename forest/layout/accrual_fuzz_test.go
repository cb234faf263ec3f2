package layout

import (
	"fmt"
	"math"
	"testing"

	"steelyard/meta/review"
)

// FuzzAccrual lays out both charts of accrual with any numbers: an error, or
// pages on which everything has its place.
func FuzzAccrual(f *testing.F) {
	f.Add(0.5, 0.2, 1.0, 0.2, 0.0, true, uint8(9), uint16(2001), "Name")
	f.Add(-13.0, 50.0, -30.0, 0.999999, 5.0, true, uint8(2), uint16(0), "")
	f.Add(1e11, 1e-9, 1e11, 1e-9, 1e11, false, uint8(3), uint16(9990), "Ñandú 中文 <b>")
	f.Add(0.0, 0.0, 0.0, 0.0, 0.0, false, uint8(1), uint16(1), "\x00")
	f.Add(math.NaN(), 1.0, math.Inf(1), 2.0, 1.0, true, uint8(5), uint16(7), "x")
	f.Fuzz(func(t *testing.T, estimate, se, ln, prior, null float64, ratio bool, k uint8, year uint16, name string) {
		if k == 0 || k > 60 || len(name) > 300 {
			return
		}
		scale := EffectScale{Measure: name, Ratio: ratio, Null: null, Decimals: int(k) % 4}
		points := CumulativeInput{Title: name, Scale: scale, Sides: Sides{Lower: name}, Prior: prior, Level: 0.95}
		omissions := LeaveOneOutInput{Title: name, Scale: scale, Sides: Sides{Higher: name}, Below: math.NaN(), Level: 0.95}
		for i := range int(k) {
			y := estimate * (1 + math.Sin(float64(i))/3)
			low, high := y-2*math.Abs(se), y+3*math.Abs(se)/float64(i+1)
			at := ln * math.Cos(float64(i)*3)
			points.Points = append(points.Points, CumulativePoint{
				Entered: []Arrival{{name, "2001"}}, Date: review.Date{Year: int(year) + i*int(year%3), Month: i * int(year%5) % 2}, K: i + 1,
				Estimate: y, Low: low, High: high, LnEvidence: at,
			})
			omissions.Rows = append(omissions.Rows, Omission{Name: name, Year: "2001", Estimate: y, Low: low, High: high, Tau: se, LnEvidence: at})
			omissions.All = omissions.Rows[0]
		}
		for _, width := range []float64{WideWidth, NarrowWidth} {
			var pages []Drawing
			if doc, err := Cumulative(points, Style{Width: width}); err == nil {
				pages = append(pages, doc.Pages...)
			}
			if doc, err := LeaveOneOut(omissions, Style{Width: width}); err == nil {
				pages = append(pages, doc.Pages...)
			}
			for _, page := range pages {
				checkPage(t, fmt.Sprint(width), page)
			}
		}
	})
}
