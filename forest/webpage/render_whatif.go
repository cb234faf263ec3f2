package webpage

import (
	"cmp"
	"encoding/json"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// whatIfView is what a reader can change about an outcome, and how it was planned.
type whatIfView struct {
	Outcome string // as the sheet spells it
	Noun    string // "trial" or "study"
	Nouns   string
	Studies []whatIfStudy
	Groups  []whatIfGroup
	Columns []whatIfColumn // by which whole groups can be left out
	Numbers []whatIfNumber // of a study that nobody has done
}

// whatIfStudy is a row of the sheet that was pooled as planned.
type whatIfStudy struct {
	Row        int
	Name, Year string
	Cells      map[string]string // by the name of the column
}

// proseColumns are columns of the sheet that hold sentences, not groups; firstColumns are
// those that a panel asks about first.
var (
	proseColumns = []string{review.NoteField.String(), review.SourceField.String(), review.HowObtained.String(), review.Accept.String(), review.Registration.String()}
	firstColumns = []string{review.RiskOfBias.String(), review.Subgroup.String(), "year", "converted"}
)

// whatIfColumn is a column of the sheet with its values, or a range of years or numbers.
type whatIfColumn struct {
	Name   string
	Values []string // nil for numbers, which have a range in their place
}

// whatIfGroup is a set of settings that are changed together.
type whatIfGroup struct {
	Name, Title string
	Settings    []whatIfSetting
}

// whatIfSetting is a setting with what holds as planned.
type whatIfSetting struct {
	review.Setting
	Planned string
}

// whatIfNumber is a number of a hypothetical study: the field and how it is called here.
type whatIfNumber struct{ Field, Label string }

// whatIfSettings are the settings that the page offers, by group.
var whatIfSettings = []struct {
	name, title string
	settings    []string
}{
	{"model", "Model and interval", []string{review.SettingEffects, review.SettingTau, review.SettingInterval, review.SettingLevel}},
	{"meaning", "Thresholds and beliefs", []string{review.SettingNull, review.SettingImportant, review.SettingBaseline, review.SettingPrior, review.SettingOrder}},
}

// whatIf returns what can be changed about an outcome; nil where nothing was pooled.
func whatIf(s *synthesis.Synthesis, o *synthesis.Outcome) *whatIfView {
	if o.Result == nil || len(o.Studies) == 0 {
		return nil
	}
	w := &whatIfView{Outcome: o.Name, Noun: words.Noun(s, 1), Nouns: words.Noun(s, 2), Numbers: whatIfNumbers(s, o)}
	for _, study := range o.Studies {
		w.Studies = append(w.Studies, whatIfStudyOf(study))
	}
	w.Columns = whatIfColumns(w.Studies)
	for _, g := range whatIfSettings {
		group := whatIfGroup{Name: g.name, Title: g.title}
		for _, setting := range review.Settings() {
			if slices.Contains(g.settings, setting.Name) {
				group.Settings = append(group.Settings, whatIfSetting{setting, plannedValue(s, o, setting)})
			}
		}
		w.Groups = append(w.Groups, group)
	}
	return w
}

// plannedValue is what holds for a setting as planned, settled where the analysis
// settles it.
func plannedValue(s *synthesis.Synthesis, o *synthesis.Outcome, setting review.Setting) string {
	model := o.Analysis.Model
	switch setting.Name {
	case review.SettingEffects:
		return model.Effects.String()
	case review.SettingTau:
		return model.Tau.String()
	case review.SettingInterval:
		return model.Interval.String()
	}
	if text := s.Plan.Value(setting.Name, o.Name).Text; text != "" {
		return text
	}
	return setting.Unless
}

// whatIfStudyOf returns a study with the texts by which it can be grouped.
func whatIfStudyOf(study synthesis.Study) whatIfStudy {
	src := study.Source
	w := whatIfStudy{Row: src.Row.Row, Name: src.Name, Year: src.Cell("year"), Cells: map[string]string{"converted": "no"}}
	if study.Converted() {
		w.Cells["converted"] = "yes"
	}
	for _, remark := range src.Remarks {
		if text := strings.TrimSpace(remark.Text); text != "" && !slices.Contains(proseColumns, remark.Header) {
			w.Cells[remark.Header] = text
		}
	}
	if w.Year != "" {
		w.Cells["year"] = w.Year
	}
	return w
}

// mostGroups bounds the values of a column whose groups can be left out one by one.
const mostGroups = 12

// whatIfColumns are the columns that tell the studies apart without telling each from
// all others: firstColumns, then the rest by their names.
func whatIfColumns(studies []whatIfStudy) []whatIfColumn {
	var names []string
	for _, study := range studies {
		for name := range study.Cells {
			if !slices.Contains(names, name) {
				names = append(names, name)
			}
		}
	}
	slices.SortFunc(names, func(a, b string) int {
		return cmp.Or(cmp.Compare(columnRank(a), columnRank(b)), cmp.Compare(strings.ToLower(a), strings.ToLower(b)))
	})
	var columns []whatIfColumn
	for _, name := range names {
		values, numbers := columnValues(studies, name)
		switch few := len(values) <= mostGroups && len(values) < len(studies); {
		case len(values) < 2:
		case numbers && (name == "year" || !few):
			columns = append(columns, whatIfColumn{Name: name})
		case few:
			columns = append(columns, whatIfColumn{name, values})
		}
	}
	return columns
}

func columnRank(name string) int {
	if i := slices.Index(firstColumns, name); i >= 0 {
		return i
	}
	return len(firstColumns)
}

// columnValues returns the different texts of a column, a blank among them, and whether
// all that are filled are numbers.
func columnValues(studies []whatIfStudy, name string) (values []string, numbers bool) {
	numbers = true
	for _, study := range studies {
		text := study.Cells[name]
		if !slices.Contains(values, text) {
			values = append(values, text)
		}
		_, err := strconv.ParseFloat(text, 64)
		numbers = numbers && (text == "" || err == nil)
	}
	slices.Sort(values)
	return values, numbers
}

// whatIfNumbers are the numbers by which a hypothetical study is given: counts or means
// where the studies have them, else an estimate with its standard error.
func whatIfNumbers(s *synthesis.Synthesis, o *synthesis.Outcome) []whatIfNumber {
	has := func(f review.Field) bool {
		return slices.ContainsFunc(o.Studies, func(st synthesis.Study) bool { _, ok := st.Source.Number(f); return ok })
	}
	of := func(f review.Field, arm int, what string) whatIfNumber {
		return whatIfNumber{f.String(), fmt.Sprintf("%s, %s", words.Capital(s.Arms[arm]), what)}
	}
	switch {
	case has(review.EventsTreated) && has(review.TotalControl):
		return []whatIfNumber{
			of(review.EventsTreated, 0, "events"), of(review.TotalTreated, 0, "people"),
			of(review.EventsControl, 1, "events"), of(review.TotalControl, 1, "people"),
		}
	case has(review.MeanTreated) && has(review.SDTreated) && has(review.TotalTreated):
		return []whatIfNumber{
			of(review.MeanTreated, 0, "mean"), of(review.SDTreated, 0, "standard deviation"), of(review.TotalTreated, 0, "people"),
			of(review.MeanControl, 1, "mean"), of(review.SDControl, 1, "standard deviation"), of(review.TotalControl, 1, "people"),
		}
	}
	se := "Standard error"
	if o.Analysis.Measure.Log() {
		se += " of its logarithm"
	}
	return []whatIfNumber{{review.Estimate.String(), words.Capital(words.Measure(o.Analysis.Measure))}, {review.StandardError.String(), se}}
}

// whatIf writes the controls of an outcome. They stay hidden until the page's script
// finds an engine to ask.
func (m *markup) whatIf(id string, w *whatIfView) {
	if w == nil {
		return
	}
	m.open("div", "class", "whatif", "role", "region", "id", id+"-whatif", "aria-labelledby", id+"-h-whatif", "data-whatif", id,
		"data-name", w.Outcome, "data-noun", w.Noun, "data-nouns", w.Nouns, "hidden", on)
	m.raw("\n")
	m.element("h3", "What if …?", "id", id+"-h-whatif")
	m.raw("\n")
	m.element("p", "Change the analysis: every number, table and chart of this outcome follows, and the plan’s answer stays beside it.", "class", "under")
	m.raw("\n<div class=\"wi-groups\">\n")
	m.whatIfStudies(id, w)
	for i := range w.Groups {
		m.whatIfGroup(id, &w.Groups[i])
	}
	m.whatIfAdded(id, w)
	m.raw("</div>\n</div>\n")
}

// whatIfFold opens a folded part of the controls; the script writes how many changes it
// holds.
func (m *markup) whatIfFold(name, title string) {
	m.open("details", "class", "wi-group", "data-group", name)
	m.raw("<summary>")
	m.text(title)
	m.raw("<span class=\"wi-count\"></span></summary>\n<div class=\"wi-in\">\n")
}

// whatIfStudies writes a box for each study and choices of whole groups.
func (m *markup) whatIfStudies(id string, w *whatIfView) {
	m.whatIfFold("studies", words.Capital(w.Nouns)+" in or out")
	m.raw("<fieldset class=\"wi-each\">")
	m.element("legend", "Each "+w.Noun)
	m.raw("<ul>\n")
	for _, study := range w.Studies {
		cells, err := json.Marshal(study.Cells)
		if err != nil {
			cells = []byte("{}") // texts can always be written
		}
		m.raw("<li><label>")
		m.open("input", "type", "checkbox", "checked", on, "data-row", whole(study.Row), "data-study-name", study.Name, "data-cells", string(cells), "autocomplete", "off")
		m.raw("<span>")
		m.text(study.Name)
		if study.Year != "" && !strings.Contains(study.Name, study.Year) {
			m.raw(" ")
			m.element("span", study.Year, "class", "ci")
		}
		m.raw("</span></label></li>\n")
	}
	m.raw("</ul></fieldset>\n")
	if len(w.Columns) > 0 {
		m.whatIfColumns(id, w)
	}
	m.raw("</div></details>\n")
}

// whatIfColumns writes the choice of a column and, for each, a box per value or a range.
func (m *markup) whatIfColumns(id string, w *whatIfView) {
	m.raw("<fieldset class=\"wi-whole\">")
	m.element("legend", "Whole groups")
	m.raw("<div class=\"wi-columns\">\n")
	for i, column := range w.Columns {
		m.open("div", "role", "group", "class", "wi-column", "data-column", column.Name, "aria-labelledby", fmt.Sprintf("%s-wi-c%d", id, i))
		m.element("span", words.Capital(column.Name), "class", "wi-name", "id", fmt.Sprintf("%s-wi-c%d", id, i))
		if column.Values == nil {
			for _, end := range []string{"from", "to"} {
				m.raw("<label>")
				m.text(end + " ")
				m.open("input", "type", "text", "inputmode", "decimal", "size", "6", "data-end", end, "autocomplete", "off")
				m.raw("</label>")
			}
		}
		for _, value := range column.Values {
			label := value
			if value == "" {
				label = "(blank)"
			}
			m.raw("<label>")
			m.open("input", "type", "checkbox", "checked", on, "data-value", value, "autocomplete", "off")
			m.element("span", label)
			m.raw("</label>")
		}
		m.raw("</div>\n")
	}
	m.raw("</div></fieldset>\n")
}

// whatIfGroup writes the controls of some settings, with the choices and words of the
// table of settings.
func (m *markup) whatIfGroup(id string, g *whatIfGroup) {
	m.whatIfFold(g.Name, g.Title)
	for _, s := range g.Settings {
		field, help := id+"-wi-"+s.Name, id+"-wi-"+s.Name+"-help"
		m.raw("<div class=\"wi-field\">")
		m.element("label", words.Capital(strings.ReplaceAll(s.Name, "-", " ")), "for", field)
		if len(s.Values) > 0 {
			m.open("select", "id", field, "data-setting", s.Name, "data-planned", s.Planned, "aria-describedby", help, "autocomplete", "off")
			m.element("option", "as planned: "+s.Planned, "value", " ")
			for _, value := range s.Values {
				if value != s.Planned {
					m.element("option", value)
				}
			}
			m.raw("</select>")
		} else {
			m.open("input", "type", "text", "id", field, "data-setting", s.Name, "data-planned", s.Planned, "placeholder", "as planned"+when(s.Planned != "", ": "+s.Planned), "aria-describedby", help, "autocomplete", "off", "spellcheck", "false")
		}
		about := words.Capital(s.Meaning)
		if s.Unit != "" {
			about += "; " + s.Unit
		}
		m.element("p", about+".", "class", "wi-help", "id", help)
		m.raw("</div>\n")
	}
	m.raw("</div></details>\n")
}

// whatIfAdded writes the form of a study that nobody has done.
func (m *markup) whatIfAdded(id string, w *whatIfView) {
	m.whatIfFold("added", "A next "+w.Noun)
	m.raw("<form class=\"wi-added\" autocomplete=\"off\">\n")
	m.element("p", "A result that nobody has seen, added to those that were. It is always marked as hypothetical.", "class", "wi-help")
	m.raw("\n")
	for i, n := range w.Numbers {
		field := fmt.Sprintf("%s-wi-n%d", id, i)
		m.raw("<div class=\"wi-field\">")
		m.element("label", n.Label, "for", field)
		m.open("input", "type", "text", "inputmode", "decimal", "id", field, "data-number", n.Field, "autocomplete", "off")
		m.raw("</div>\n")
	}
	m.raw("<div class=\"wi-field\">")
	m.element("label", "Year", "for", id+"-wi-year")
	m.open("input", "type", "text", "inputmode", "numeric", "id", id+"-wi-year", "data-added-year", on, "placeholder", "after the last", "autocomplete", "off")
	m.raw("</div>\n<div class=\"wi-act\"><button type=\"submit\">Add it</button><button type=\"button\" data-act=\"take-away\" hidden>Take it away</button></div>\n</form>\n</div></details>\n")
}

// whatIfFacts returns the attributes of an unseen element: the texts of the answer that
// the page sets side by side when an analysis is changed.
func whatIfFacts(s *synthesis.Synthesis, o *synthesis.Outcome, id string) []string {
	mean := o.Result.Fit.Mean
	facts := []string{
		"class", "wi-facts", "hidden", on, "data-facts", id, "data-measure", words.Measure(o.Analysis.Measure), "data-pooled", words.Number(len(o.Studies), words.Noun(s, 1), words.Noun(s, 2)),
		"data-studies", whole(len(o.Studies)), "data-estimate", words.MeanEstimate(o), "data-low", words.ReaderValue(o, mean.Low), "data-high", words.ReaderValue(o, mean.High),
		"data-interval", words.ReaderInterval(o, meta.Limits{Low: mean.Low, High: mean.High}), "data-level", words.Level(o.Result.Fit.Model.Level),
	}
	if o.Analysis.NullMissing {
		return facts
	}
	return append(facts, "data-steps", words.Linear(mean.Evidence.Steps(), 2), "data-odds", words.Odds(mean.Evidence.Ln()), "data-strength", words.Strength(mean.Evidence))
}
