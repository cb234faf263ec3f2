package webpage

import (
	"steelyard/meta/synthesis"
)

// Place is where an outcome stands on the page: the prefix of its elements' ids, and how
// many figures and tables are numbered before its own.
type Place struct {
	Outcome string `json:"name"` // as the sheet spells it
	ID      string `json:"id"`
	Figures int    `json:"figures"`
	Tables  int    `json:"tables"`
	Late    int    `json:"late"` // tables of the sections that First leaves out and that come after the analyses without one study
}

// Extent says how much of an outcome is written.
type Extent int

// Extents.
const (
	Whole       Extent = iota
	First              // what is worked out at once: the answer, the forest chart, the panel's part, the studies, the methods; of a chart in two forms the wide one
	FirstNarrow        // First with the narrow forms
)

// late are the sections that First leaves out.
var late = []string{"accrual", "rests", "other", "posterior", "small"}

// Section is a whole element of the page, with its id.
type Section struct {
	ID   string `json:"id"`
	HTML string `json:"html"`
}

// Part is an outcome's share of the page.
type Part struct {
	Lead     string      // HTML of the sentence with which the page opens for it, for the element with id "…-lead"
	Sections []Section   // in the order of the page, its methods last
	Late     []string    // ids of sections that the extent leaves out
	CSS      string      // rules for the places in them
	Data     OutcomeData // for the page's script
}

// PartOf writes an outcome's share of the page: the same as Page writes for it if it
// stands at that place. First leaves sections out; the numbers of the tables behind them
// are then those of the plan.
func PartOf(s *synthesis.Synthesis, i int, at Place, extent Extent) (Part, error) {
	v := &view{drawn: newDrawn()}
	v.figures, v.tables, v.extent = at.Figures, at.Tables, extent
	o, err := v.outcome(s, i, &at)
	if err != nil {
		return Part{}, err
	}
	var lead markup
	lead.lead(o)
	methods := methodsOf(s, &s.Outcomes[i], at.ID)
	part := Part{Lead: lead.String(), Sections: append(o.sections(), methods.section()), Late: []string{}, CSS: v.positions.css(), Data: v.data.Outcomes[0]}
	if extent != Whole && s.Outcomes[i].Result != nil {
		for _, name := range late {
			part.Late = append(part.Late, at.ID+"-"+name)
		}
	}
	return part, nil
}

// WantedOf returns the parts of a synthesis that the page shows to that extent.
func WantedOf(extent Extent) synthesis.Want {
	if extent != Whole {
		return synthesis.Want{Cumulative: true, LeaveOneOut: true, Further: synthesis.Further{Panel: &synthesis.PanelWanted{}}}
	}
	return Wanted()
}

// Wanted returns the parts of a synthesis that the page shows.
func Wanted() synthesis.Want {
	return synthesis.Want{
		Cumulative: true, LeaveOneOut: true, Beliefs: true, Runs: true,
		Further: synthesis.Further{Panel: &synthesis.PanelWanted{}, SmallStudy: &synthesis.SmallStudyWanted{}, Posterior: true},
	}
}
