package review

import (
	"encoding/json"

	"steelyard/meta/effect"
)

// The JSON of an extraction and of a plan holds all that an analysis needs: what is
// read back from it gives the same results to the last bit.

// MarshalText writes the field's name; NoField is blank.
func (f Field) MarshalText() ([]byte, error) { return []byte(f.String()), nil }

// UnmarshalText reads the name of a field; blank is NoField.
func (f *Field) UnmarshalText(text []byte) (err error) {
	*f = NoField
	if len(text) > 0 {
		*f, err = ParseField(string(text))
	}
	return err
}

// UnmarshalText reads the name of an origin.
func (f *From) UnmarshalText(text []byte) (err error) {
	*f, err = fromNames.Parse(string(text))
	return err
}

type extractionJSON struct {
	Source   Source        `json:"source"`
	Columns  []columnJSON  `json:"columns"`
	Studies  []studyJSON   `json:"studies"`
	Findings []findingJSON `json:"findings,omitempty"`

	Judgements []judgementJSON `json:"judgements,omitempty"`
}

type judgementJSON struct {
	Outcome string     `json:"outcome,omitempty"`
	Domain  string     `json:"domain"`
	Rating  string     `json:"rating"`
	Reason  string     `json:"reason,omitempty"`
	By      string     `json:"by,omitempty"`
	Date    [3]int     `json:"date,omitzero"` // year, month, day; 0 where unknown
	Place   *placeJSON `json:"place,omitempty"`
}

type columnJSON struct {
	Header string     `json:"header"`
	Field  Field      `json:"field,omitzero"`
	Place  *placeJSON `json:"place,omitempty"`
}

type placeJSON struct {
	File  string `json:"file,omitempty"`
	Sheet string `json:"sheet,omitempty"`
	Row   int    `json:"row,omitempty"`
	Col   int    `json:"col,omitempty"`
	Text  string `json:"text,omitempty"`
}

type studyJSON struct {
	Name    string       `json:"study"`
	ID      string       `json:"id,omitempty"`
	Date    [3]int       `json:"date,omitzero"` // year, month, day; 0 where unknown
	Outcome string       `json:"outcome,omitempty"`
	Measure string       `json:"measure,omitempty"`
	Better  string       `json:"better,omitempty"`
	Row     *placeJSON   `json:"row,omitempty"`
	Numbers []numberJSON `json:"numbers,omitempty"`
	Remarks []remarkJSON `json:"remarks,omitempty"`
}

type numberJSON struct {
	Field Field   `json:"field"`
	Value float64 `json:"value"`
	Row   int     `json:"row,omitempty"`
	Col   int     `json:"col,omitempty"`
	Text  string  `json:"text,omitempty"`
}

type remarkJSON struct {
	Header string `json:"header"`
	Text   string `json:"text"`
	Col    int    `json:"col,omitempty"`
}

type findingJSON struct {
	Severity Severity      `json:"severity"`
	Rule     string        `json:"rule"`
	Place    *placeJSON    `json:"place,omitempty"`
	Study    string        `json:"study,omitempty"`
	Outcome  string        `json:"outcome,omitempty"`
	Message  string        `json:"message"`
	Accepted string        `json:"accepted,omitempty"`
	Readings []readingJSON `json:"readings,omitempty"`
}

type readingJSON struct {
	Label   string       `json:"label"`
	Numbers []numberJSON `json:"numbers"`
}

// MarshalJSON writes the extraction whole.
func (x *Extraction) MarshalJSON() ([]byte, error) {
	d := extractionJSON{Source: x.Source}
	for _, c := range x.Columns {
		d.Columns = append(d.Columns, columnJSON{c.Header, c.Field, placeDocument(c.Place)})
	}
	for i := range x.Studies {
		d.Studies = append(d.Studies, studyDocument(&x.Studies[i]))
	}
	for _, f := range x.Findings {
		entry := findingJSON{f.Severity, f.Rule, placeDocument(f.Place), f.Study, f.Outcome, f.Message, f.Accepted, nil}
		for _, r := range f.Readings {
			entry.Readings = append(entry.Readings, readingJSON{r.Label, numberDocuments(r.Numbers)})
		}
		d.Findings = append(d.Findings, entry)
	}
	for _, j := range x.Judgements {
		d.Judgements = append(d.Judgements, judgementJSON{j.Outcome, j.Domain.String(), j.Rating, j.Reason, j.By, dateParts(j.Date), placeDocument(j.Place)})
	}
	return json.Marshal(d)
}

// UnmarshalJSON reads what MarshalJSON wrote.
func (x *Extraction) UnmarshalJSON(data []byte) error {
	var d extractionJSON
	if err := json.Unmarshal(data, &d); err != nil {
		return err
	}
	*x = Extraction{Source: d.Source}
	for _, c := range d.Columns {
		x.Columns = append(x.Columns, Column{c.Header, c.Field, c.Place.place()})
	}
	for i := range d.Studies {
		study, err := d.Studies[i].study()
		if err != nil {
			return err
		}
		x.Studies = append(x.Studies, study)
	}
	for _, f := range d.Findings {
		finding := Finding{f.Severity, f.Rule, f.Place.place(), f.Study, f.Outcome, f.Message, f.Accepted, nil}
		for _, r := range f.Readings {
			finding.Readings = append(finding.Readings, Reading{r.Label, numbersOf(r.Numbers)})
		}
		x.Findings = append(x.Findings, finding)
	}
	for _, j := range d.Judgements {
		domain, err := ParseDomain(j.Domain)
		if err != nil {
			return err
		}
		x.Judgements = append(x.Judgements, Judgement{j.Outcome, domain, j.Rating, j.Reason, j.By, dateOf(j.Date), j.Place.place()})
	}
	return nil
}

func dateParts(d Date) [3]int { return [3]int{d.Year, d.Month, d.Day} }

func dateOf(parts [3]int) Date { return Date{parts[0], parts[1], parts[2]} }

func placeDocument(p Place) *placeJSON {
	if p == (Place{}) {
		return nil
	}
	d := placeJSON(p)
	return &d
}

func (d *placeJSON) place() Place {
	if d == nil {
		return Place{}
	}
	return Place(*d)
}

func studyDocument(s *Study) studyJSON {
	d := studyJSON{
		Name: s.Name, ID: s.ID, Date: dateParts(s.Date), Outcome: s.Outcome,
		Better: s.Better.String(), Row: placeDocument(s.Row), Numbers: numberDocuments(s.Numbers),
	}
	if s.Measure != effect.Unspecified {
		d.Measure = s.Measure.String()
	}
	for _, r := range s.Remarks {
		d.Remarks = append(d.Remarks, remarkJSON(r))
	}
	return d
}

func (d *studyJSON) study() (s Study, err error) {
	s = Study{
		Name: d.Name, ID: d.ID, Date: dateOf(d.Date), Outcome: d.Outcome,
		Row: d.Row.place(), Numbers: numbersOf(d.Numbers),
	}
	for _, r := range d.Remarks {
		s.Remarks = append(s.Remarks, Remark(r))
	}
	if d.Measure != "" {
		if s.Measure, err = effect.ParseMeasure(d.Measure); err != nil {
			return s, err
		}
	}
	if d.Better != "" {
		s.Better, err = ParseBetter(d.Better)
	}
	return s, err
}

func numberDocuments(numbers []Number) []numberJSON {
	var all []numberJSON
	for _, n := range numbers {
		all = append(all, numberJSON{n.Field, n.Value, n.Place.Row, n.Place.Col, n.Place.Text})
	}
	return all
}

func numbersOf(documents []numberJSON) []Number {
	var all []Number
	for _, d := range documents {
		all = append(all, Number{d.Field, d.Value, Spot{d.Row, d.Col, d.Text}})
	}
	return all
}

type planJSON struct {
	Given []givenJSON `json:"given,omitempty"`
	Runs  []runJSON   `json:"runs,omitempty"`
}

type givenJSON struct {
	Setting string     `json:"setting"`
	Outcome string     `json:"outcome,omitempty"` // folded; blank for all
	Value   string     `json:"value"`
	From    From       `json:"from"`
	Place   *placeJSON `json:"place,omitempty"`
	Reason  string     `json:"reason,omitempty"`
	Date    [3]int     `json:"date,omitzero"` // year, month, day; 0 where unknown
}

type runJSON struct {
	Name    string            `json:"name"`
	Outcome string            `json:"outcome,omitempty"`
	Changes map[string]string `json:"changes"`
	Place   *placeJSON        `json:"place,omitempty"`
}

// MarshalJSON writes what was given and the planned runs.
func (p *Plan) MarshalJSON() ([]byte, error) {
	var d planJSON
	for from := FromSheet; from <= FromFlag; from++ {
		for _, g := range p.Given(from) {
			d.Given = append(d.Given, givenJSON{g.Setting, g.Outcome, g.Value.Text, from, placeDocument(g.Value.Place), g.Value.Reason, dateParts(g.Value.Date)})
		}
	}
	for _, r := range p.Runs {
		d.Runs = append(d.Runs, runJSON{r.Name, r.Outcome, r.Changes, placeDocument(r.Place)})
	}
	return json.Marshal(d)
}

// UnmarshalJSON reads what MarshalJSON wrote; settings are checked as Set does.
func (p *Plan) UnmarshalJSON(data []byte) error {
	var d planJSON
	if err := json.Unmarshal(data, &d); err != nil {
		return err
	}
	*p = Plan{}
	for _, g := range d.Given {
		if err := p.Set(g.Setting, g.Outcome, Value{Text: g.Value, From: g.From, Place: g.Place.place(), Reason: g.Reason, Date: dateOf(g.Date)}); err != nil {
			return err
		}
	}
	for _, r := range d.Runs {
		p.Runs = append(p.Runs, Run{r.Name, r.Outcome, r.Changes, r.Place.place()})
	}
	return nil
}
