package audit

import (
	"strconv"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// list writes a sheet that is a table of texts.
func (b *book) list(name, title, subtitleText string, heads []string, widths []float64, rows [][]string) {
	s := b.sheet(name)
	s.text(1, 1, look{role: heading}, title)
	s.text(1, 2, look{role: subtitle}, subtitleText)
	for i, h := range heads {
		s.text(i+1, 4, look{role: headText}, h)
	}
	for i, row := range rows {
		for j, text := range row {
			s.text(j+1, 5+i, look{role: wrapped}, text)
		}
	}
	if len(rows) == 0 {
		s.text(1, 5, look{role: soft}, "none")
	}
	s.finish(page{widths: widths, frozen: s.at(1, 5), repeated: 4})
}

// writeConversions writes the record of all conversions.
func (b *book) writeConversions(s *synthesis.Synthesis) {
	var rows [][]string
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		for j := range o.Studies {
			study := &o.Studies[j]
			for _, c := range study.Conversions {
				rows = append(rows, []string{o.Name, study.Source.Name, c.What, valuesText(c.From), valuesText(c.To), c.Source, strings.Join(study.Assumptions, "; ")})
			}
		}
	}
	b.list("conversions", "Conversions", "The program's record of each step from the numbers as read to the effects. The steps as formulas stand on the sheets of effects.",
		[]string{"outcome", "study", "what was done", "from", "to", "source", "what the number rests on besides the report"},
		[]float64{20, 24, 40, 44, 36, 26, 34}, rows)
}

func valuesText(values []effect.Value) string {
	var all []string
	for _, v := range values {
		all = append(all, v.Name+" "+strconv.FormatFloat(v.Value, 'g', 10, 64))
	}
	return strings.Join(all, ", ")
}

// writeFindings writes what was found in the sheet and in the analysis.
func (b *book) writeFindings(s *synthesis.Synthesis) {
	var rows [][]string
	for _, severity := range []review.Severity{review.Error, review.Warning, review.Note} {
		for _, f := range s.Findings {
			if f.Severity == severity {
				rows = append(rows, []string{f.Severity.String(), f.Rule, f.Place.String(), f.Study, f.Outcome, f.Message, f.Accepted})
			}
		}
	}
	b.list("findings", "Findings", "What a person should look at in the sheet and the results. An error keeps its row from being pooled until it is mended or accepted.",
		[]string{"severity", "rule", "place", "study", "outcome", "message", "accepted, because"}, []float64{10, 7, 18, 24, 22, 80, 30}, rows)
}

// writePlan writes the settings of each outcome with their origin.
func (b *book) writePlan(s *synthesis.Synthesis) {
	var rows [][]string
	for i := range s.Outcomes {
		name := s.Outcomes[i].Name
		for _, setting := range review.Settings() {
			v := s.Plan.Value(setting.Name, name)
			text := v.Text
			if v.From == review.FromDefault && setting.Unless != "" {
				text = strings.TrimPrefix(text+"; "+setting.Unless, "; ")
			}
			place := ""
			if v.From == review.FromSheet {
				place = v.Place.String()
			}
			rows = append(rows, []string{name, setting.Name, text, v.From.String(), place, v.Reason, v.Date.String()})
		}
	}
	for _, run := range s.Plan.Runs {
		var changes []string
		for _, setting := range settingNames() {
			if value, ok := run.Changes[setting]; ok {
				changes = append(changes, setting+" = "+value)
			}
		}
		rows = append(rows, []string{run.Outcome, "planned run: " + run.Name, strings.Join(changes, "; "), "sheet", run.Place.String(), "", ""})
	}
	b.list("plan", "Plan", "Every setting with its value and where it came from.", []string{"outcome", "setting", "value", "from", "place", "reason", "date"},
		[]float64{24, 26, 56, 9, 16, 50, 12}, rows)
}

func settingNames() []string {
	var names []string
	for _, s := range review.Settings() {
		names = append(names, s.Name)
	}
	return names
}
