package synthesis

import "steelyard/meta/review"

// CheckDocument is the JSON of a check: that of a synthesis without its outcomes,
// with the number of findings and the rules that could not be checked.
type CheckDocument struct {
	Format     string                  `json:"format"`
	Program    ProgramDocument         `json:"program"`
	Source     SourceDocument          `json:"source"`
	Plan       map[string]PlanDocument `json:"plan"`
	Rows       int                     `json:"rows"`
	Numbers    int                     `json:"numbers"`
	Counts     FindingCountsDocument   `json:"counts"`
	Findings   []FindingDocument       `json:"findings"`
	NotChecked []NotCheckedDocument    `json:"not_checked"`
	Compared   *ComparedDocument       `json:"compared,omitempty"`
	Cautions   []string                `json:"cautions"`
}

// ComparedDocument counts the rows of two extractions of the same studies.
type ComparedDocument struct {
	Other      SourceDocument `json:"other"`
	Identical  int            `json:"identical"`
	Rounding   int            `json:"rounding"`
	Differing  int            `json:"differing"`
	Large      int            `json:"large"` // of the differing ones: by more than the tolerance
	OnlyFirst  int            `json:"only_first"`
	OnlySecond int            `json:"only_second"`
}

// FindingCountsDocument counts findings by severity; accepted ones stand apart.
type FindingCountsDocument struct {
	Errors   int `json:"errors"`
	Warnings int `json:"warnings"`
	Notes    int `json:"notes"`
	Accepted int `json:"accepted"`
}

// NotCheckedDocument is a rule that the sheet lacks columns for.
type NotCheckedDocument struct {
	Rule    string   `json:"rule"`
	Title   string   `json:"title"`
	Missing []string `json:"missing"`
}

// CheckDocument returns the findings of a synthesis, with what the sheet was read to
// hold and the rules not checked.
func (s *Synthesis) CheckDocument(version string, rows, numbers int, notChecked []NotCheckedDocument) CheckDocument {
	d := s.Document(version)
	return CheckDocument{
		Format: d.Format, Program: d.Program, Source: d.Source, Plan: d.Plan, Rows: rows, Numbers: numbers,
		Counts: s.CountFindings(), Findings: d.Findings, NotChecked: notChecked, Cautions: d.Cautions,
	}
}

// CountFindings counts the findings by severity; accepted ones stand apart.
func (s *Synthesis) CountFindings() FindingCountsDocument {
	var n FindingCountsDocument
	for _, f := range s.Findings {
		switch {
		case f.Accepted != "":
			n.Accepted++
		case f.Severity == review.Error:
			n.Errors++
		case f.Severity == review.Warning:
			n.Warnings++
		default:
			n.Notes++
		}
	}
	return n
}
