package audit

import (
	"bytes"
	"fmt"
	"image/png"

	"github.com/xuri/excelize/v2"

	"steelyard/forest"
	"steelyard/forest/layout"
	"steelyard/meta/effect"
	"steelyard/meta/synthesis"
)

// Where the sheet of charts has what: pictures at the left, charts of the spreadsheet
// program beside them, their data at the far right.
const (
	pictureColumn = 1
	chartColumn   = 13
	dataColumn    = 24
	chartsRow     = 4
)

// pictureDPI is the resolution of the pictures, and screenDPI what the library takes
// a dot for.
const pictureDPI, screenDPI = 150, 96

// rowHeight is the height of a row in screen dots.
const rowHeight = 20

// writeCharts writes the forest and the cumulative chart, as pictures and as charts
// that move with the cells.
func (o *outcome) writeCharts() {
	s := o.open("charts", "Charts", "left: as the program draws them, for the numbers as read; right: drawn by the spreadsheet program, moving with the cells")
	row := o.picture(s, chartsRow, "forest chart", func() (layout.Document, error) {
		in, err := layout.ForestOf(o.s, o.o)
		if err != nil {
			return layout.Document{}, err
		}
		return layout.Forest(in, layout.Style{})
	})
	second := max(row, chartsRow+24)
	if o.o.Accrual != nil && len(o.o.Accrual.Cumulative) > 0 {
		o.picture(s, second, "cumulative chart", func() (layout.Document, error) {
			in, err := layout.CumulativeOf(o.s, o.o)
			if err != nil {
				return layout.Document{}, err
			}
			return layout.Cumulative(in, layout.Style{})
		})
	}
	o.forestChart(s)
	o.cumulativeCharts(s, second)
	s.finish(page{rest: 9, columns: dataColumn - 2, last: second + 50, whole: true})
}

// picture draws a chart and puts its pages under each other; it returns the row below.
func (o *outcome) picture(s *sheet, row int, name string, draw func() (layout.Document, error)) int {
	if !o.book.drawings {
		return row
	}
	document, err := draw()
	if err != nil {
		s.text(pictureColumn, row, look{role: soft}, "no "+name+": "+err.Error())
		return row + 2
	}
	for _, drawing := range document.Pages {
		var b bytes.Buffer
		if err := forest.WritePNG(&b, drawing, layout.Light, pictureDPI); err != nil {
			s.text(pictureColumn, row, look{role: soft}, "no "+name+": "+err.Error())
			return row + 2
		}
		size, err := png.DecodeConfig(bytes.NewReader(b.Bytes()))
		o.book.do(err)
		scale := float64(screenDPI) / pictureDPI
		o.book.do(o.book.f.AddPictureFromBytes(s.name, s.at(pictureColumn, row).local(), &excelize.Picture{
			Extension: ".png", File: b.Bytes(),
			Format: &excelize.GraphicOptions{AltText: clean(drawing.Title), ScaleX: scale, ScaleY: scale, LockAspectRatio: true},
		}))
		row += int(float64(size.Height)*scale)/rowHeight + 3
	}
	return row
}

// forestChart draws the studies, their intervals and the mean as a scatter chart.
// Studies stand at minus their number, which the axis shows without its sign.
func (o *outcome) forestChart(s *sheet) {
	m, k := o.o.Analysis.Measure, len(o.o.Studies)
	pooling := o.sheetOf("pooling")
	s.text(dataColumn, 1, look{role: soft}, "data of the charts")
	for i, h := range []string{"interval", "row", "estimate", "row", "mean", "row"} {
		s.text(dataColumn+i, 3, look{role: head}, h)
	}
	for i := range k {
		at, study := chartsRow+3*i, firstStudy+i
		for j, col := range []int{colLow, colHigh} {
			s.formula(dataColumn, at+j, look{computed, decimals4}, "%s", pooling.at(col, study))
			s.number(dataColumn+1, at+j, look{computed, whole}, -float64(i+1))
		}
		s.formula(dataColumn+2, chartsRow+i, look{computed, decimals4}, "%s", pooling.at(colReader, study))
		s.number(dataColumn+3, chartsRow+i, look{computed, whole}, -float64(i+1))
	}
	for i, name := range []string{"ci_low", "estimate", "ci_high"} {
		s.formula(dataColumn+4, chartsRow+i, look{computed, decimals4}, toReader(m, "%s"), o.cells[name])
		s.number(dataColumn+5, chartsRow+i, look{computed, whole}, -float64(k+1))
	}
	list := func(col, rows int) string {
		return block{s.at(col, chartsRow), s.at(col, chartsRow+rows-1)}.absolute()
	}
	lowest := -float64(k + 2)
	highest := 0.
	chart := scatter(fmt.Sprintf("Studies 1 to %d, and the mean below them", k), []excelize.ChartSeries{
		stroke("interval", list(dataColumn, 3*k-1), list(dataColumn+1, 3*k-1), "0072B2"),
		points("estimate", list(dataColumn+2, k), list(dataColumn+3, k), "0072B2", "square"),
		stroke("mean", list(dataColumn+4, 3), list(dataColumn+5, 3), "1A1A1A"),
		points("mean", list(dataColumn+4, 3), list(dataColumn+5, 3), "1A1A1A", "diamond"),
	})
	chart.XAxis = axis(readerScale(m))
	chart.YAxis = axis("number of the study on the sheet of pooling")
	chart.YAxis.NumFmt = excelize.ChartNumFmt{CustomNumFmt: "0;0"}
	chart.YAxis.Minimum, chart.YAxis.Maximum = &lowest, &highest
	o.addChart(s, chartsRow, chart, m.Log())
}

func (o *outcome) addChart(s *sheet, row int, chart *excelize.Chart, logarithmic bool) {
	o.book.do(o.book.f.AddChart(s.name, s.at(chartColumn, row).local(), chart))
	o.book.charts = append(o.book.charts, logarithmic)
}

// cumulativeCharts draws evidence and estimate over the steps.
func (o *outcome) cumulativeCharts(s *sheet, row int) {
	cumulative := o.sheetOf("cumulative")
	if cumulative == nil {
		return
	}
	list := func(col int) string {
		return block{cumulative.at(col, refitFirst), cumulative.at(col, refitFirst+len(o.o.Accrual.Cumulative)-1)}.absolute()
	}
	steps := list(refitNumber)
	if !o.o.Analysis.NullMissing {
		evidence := scatter("Evidence as the studies entered", []excelize.ChartSeries{joined("steps", steps, list(refitSteps), "D55E00")})
		evidence.XAxis, evidence.YAxis = axis("step of the cumulative analysis"), axis("evidence for an effect, in steps")
		o.addChart(s, row, evidence, false)
		row += 24
	}
	estimate := scatter("Mean effect as the studies entered", []excelize.ChartSeries{
		joined("mean", steps, list(refitReader), "0072B2"), stroke("low", steps, list(refitReaderLow), "56B4E9"), stroke("high", steps, list(refitReaderHigh), "56B4E9"),
	})
	estimate.XAxis, estimate.YAxis = axis("step of the cumulative analysis"), axis(readerScale(o.o.Analysis.Measure))
	if o.o.Analysis.Measure.Log() {
		estimate.YAxis.LogBase = 2
	}
	o.addChart(s, row, estimate, false)
}

// sheetOf returns the outcome's sheet of a part; nil if there is none.
func (o *outcome) sheetOf(part string) *sheet {
	name := sheetName(part, o.at, o.many, o.o.Name)
	for _, s := range o.book.sheets {
		if s.name == name {
			return s
		}
	}
	return nil
}

func readerScale(m effect.Measure) string {
	if m == effect.Unspecified {
		return "estimate"
	}
	return m.String()
}

func scatter(title string, series []excelize.ChartSeries) *excelize.Chart {
	return &excelize.Chart{
		Type: excelize.Scatter, Series: series, ShowBlanksAs: "gap",
		Title:     excelize.ChartTitle{Paragraph: []excelize.RichTextRun{{Text: title, Font: &excelize.Font{Family: "Arial", Size: 11, Bold: true, Color: inkColour}}}},
		Legend:    excelize.ChartLegend{Position: "none"},
		Dimension: excelize.ChartDimension{Width: 640, Height: 440},
		Format:    excelize.GraphicOptions{AltText: title},
	}
}

func axis(title string) excelize.ChartAxis {
	return excelize.ChartAxis{
		MajorGridLines: true, TickLabelPosition: excelize.ChartTickLabelLow,
		Font:  excelize.Font{Family: "Arial", Size: 9, Color: inkColour},
		Title: excelize.ChartTitle{Paragraph: []excelize.RichTextRun{{Text: title, Font: &excelize.Font{Family: "Arial", Size: 9, Color: softColour}}}},
	}
}

// stroke is a series of lines without markers.
func stroke(name, x, y, colour string) excelize.ChartSeries {
	return excelize.ChartSeries{Name: name, Categories: x, Values: y, Fill: solid(colour),
		Line: excelize.LineOptions{Type: excelize.LineSolid, Width: 1.25, Fill: solid(colour)}, Marker: excelize.ChartMarker{Symbol: "none"}}
}

// points is a series of markers without lines.
func points(name, x, y, colour, symbol string) excelize.ChartSeries {
	return excelize.ChartSeries{Name: name, Categories: x, Values: y,
		Line: excelize.LineOptions{Type: excelize.LineNone}, Marker: excelize.ChartMarker{Symbol: symbol, Size: 6, Fill: solid(colour)}}
}

// joined is a series of markers joined by lines.
func joined(name, x, y, colour string) excelize.ChartSeries {
	s := stroke(name, x, y, colour)
	s.Marker = excelize.ChartMarker{Symbol: "circle", Size: 5, Fill: solid(colour)}
	return s
}

// hasTables reports whether an outcome needs the sheet of tables.
func hasTables(s *synthesis.Synthesis) bool {
	for i := range s.Outcomes {
		if r := s.Outcomes[i].Result; r != nil && r.Fit.Model.Evidence != 0 {
			return true
		}
	}
	return false
}
