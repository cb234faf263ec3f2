package audit

import (
	"bytes"
	"fmt"
	"io"

	"github.com/xuri/excelize/v2"

	"steelyard/forest/report/audit/formula"
	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Wanted is what the workbook shows beyond the pooled result; a synthesis that lacks
// it gives a workbook without these sheets.
func Wanted() synthesis.Want { return synthesis.Want{Cumulative: true, LeaveOneOut: true} }

// fixedDate keeps the bytes the same in every run.
const fixedDate = "2025-01-01T00:00:00Z"

// Write writes the audit workbook (.xlsx) of a synthesis and the sheet it was made
// from, the same bytes every time; version is the program's. Texts of the sheet stay
// texts, and nothing in the workbook points outside it.
func Write(w io.Writer, s *synthesis.Synthesis, x *review.Extraction, version string) error {
	content, err := compose(s, x, version, true)
	if err == nil {
		_, err = w.Write(content)
	}
	if err != nil {
		return fmt.Errorf("writing the audit workbook: %w", err)
	}
	return nil
}

// compose returns the workbook, with or without the program's own drawings.
func compose(s *synthesis.Synthesis, x *review.Extraction, version string, drawings bool) ([]byte, error) {
	b := &book{f: excelize.NewFile(), named: map[string]formula.Range{}, styles: map[look]int{}, drawings: drawings}
	defer b.f.Close()
	b.do(b.f.SetDefaultFont("Arial"))
	about := b.sheet("about")
	numbers := b.writeStudies(s, x)
	if hasTables(s) {
		b.writeTables(mostStudies(s))
	}
	var outcomes []*outcome
	for i := range s.Outcomes {
		if s.Outcomes[i].Result == nil {
			continue
		}
		o := &outcome{book: b, s: s, o: &s.Outcomes[i], at: i, many: len(s.Outcomes), numbers: numbers, cells: map[string]cell{}}
		o.write()
		outcomes = append(outcomes, o)
	}
	b.writeConversions(s)
	b.writeFindings(s)
	b.writePlan(s)
	b.writeAbout(about, s, outcomes, version)
	b.do(b.f.SetDocProps(&excelize.DocProperties{
		Title: "Audit workbook", Subject: s.Source.File, Creator: "steelyard " + version, LastModifiedBy: "steelyard",
		Created: fixedDate, Modified: fixedDate,
	}))
	whole := true
	b.do(b.f.SetCalcProps(&excelize.CalcPropsOptions{FullCalcOnLoad: &whole}))
	if b.err != nil {
		return nil, b.err
	}
	var saved bytes.Buffer
	if err := b.f.Write(&saved); err != nil {
		return nil, err
	}
	return b.withValues(saved.Bytes())
}

// write writes the sheets of an outcome.
func (o *outcome) write() {
	o.writeEffects()
	p := o.startPooling()
	tau2 := o.writeSpread()
	p.finishPooling(tau2)
	o.writeResult()
	o.writeCumulative()
	o.writeLeaveOneOut()
	o.writeCharts()
}

// mostStudies is the largest number of studies in an outcome, and at least 2.
func mostStudies(s *synthesis.Synthesis) int {
	most := 2
	for i := range s.Outcomes {
		most = max(most, len(s.Outcomes[i].Studies))
	}
	return most
}

func readerText(o *synthesis.Outcome) string {
	mean := o.Result.Fit.Mean
	return words.Reader(o, mean.Estimate, meta.Limits{Low: mean.Low, High: mean.High})
}
