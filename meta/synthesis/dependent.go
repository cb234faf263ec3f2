package synthesis

import (
	"errors"
	"fmt"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/dependence"
	"steelyard/meta/review"
)

// settleDependence decides how several estimates from one study are treated, and
// refuses what does not go with that.
func (o *Outcome) settleDependence(asked review.Analysis, plan *review.Plan) error {
	way, err := dependence.ParseWay(plan.Value(review.SettingDependence, o.Name).Text)
	if err != nil {
		return fmt.Errorf("%s: %w", review.SettingDependence, err)
	}
	o.Analysis.Dependence = way
	if way == dependence.Independent {
		return nil
	}
	_, isTables := asked.Method.Tables()
	interval := asked.Model.Interval
	switch {
	case isTables:
		return fmt.Errorf("%s: %s allows for several estimates from one study by their standard errors, and %s pools counts without them; choose --method inverse-variance", review.SettingDependence, way, asked.Method)
	case asked.Weighing.Form.OverTau():
		return fmt.Errorf("evidence: %s integrates τ over independent studies; beside %s choose empirical, student-t, normal-prior or cauchy-prior", asked.Weighing.Form, way)
	case interval == meta.ProfileLikelihood || interval == meta.HenmiCopas || interval == meta.Wald:
		return fmt.Errorf("interval: %s is for independent studies; beside %s the interval is Student's t with its own degrees of freedom: leave the setting interval away", interval, way)
	case way == dependence.ThreeLevel && asked.Model.Effects == meta.CommonEffect:
		return fmt.Errorf("%s: %w", review.SettingDependence, dependence.ErrCommon)
	case way == dependence.ThreeLevel && asked.Model.Tau != meta.DefaultTau && asked.Model.Tau != meta.RestrictedML:
		return fmt.Errorf("tau: three levels are fitted by restricted-ml, not by %s; leave the setting tau away, or choose robust", asked.Model.Tau)
	}
	return nil
}

// noteIndependent leaves the way of dependence where no pooled study gives several
// estimates, and says so.
func (o *Outcome) noteIndependent() {
	if o.Analysis.Dependence == dependence.Independent {
		return
	}
	if groups := o.repeated(); len(groups) == 0 {
		o.note(fmt.Sprintf("The setting %s (%s) is not used: no pooled study gives more than one estimate.", review.SettingDependence, o.Analysis.Dependence))
		o.Analysis.Dependence = dependence.Independent
	}
}

// fitDependent pools studies of which some give several estimates.
func (o *Outcome) fitDependent(model meta.Model, studies []Study) (*meta.Fit, error) {
	y, s := estimates(studies)
	fit, err := dependence.Fit(o.Analysis.Dependence, model, y, s, clustersOf(studies))
	if errors.Is(err, dependence.ErrNoRepeats) { // a part of the studies
		return model.Fit(y, s)
	}
	return fit, err
}

// clustersOf numbers the studies that rows are from: by the column of clusters where
// it names some, else by id, else by name.
func clustersOf(rows []Study) []int {
	named := namesClusters(rows)
	numbers := map[string]int{}
	out := make([]int, len(rows))
	for i := range rows {
		key := clusterKey(rows[i].Source, named)
		if _, known := numbers[key]; !known {
			numbers[key] = len(numbers)
		}
		out[i] = numbers[key]
	}
	return out
}

func clusterKey(row *review.Study, named bool) string {
	if r, ok := row.Remark(review.Cluster.String()); named && ok && choice.Fold(r.Text) != "" {
		return "cluster " + choice.Fold(r.Text)
	}
	if row.ID != "" {
		return "id " + choice.Fold(row.ID)
	}
	return "name " + choice.Fold(row.Name)
}

// namesClusters reports whether the column of clusters says which estimates belong
// together, and not whether clusters of people were randomised.
func namesClusters(rows []Study) bool {
	return slices.ContainsFunc(rows, func(s Study) bool {
		r, ok := s.Source.Remark(review.Cluster.String())
		return ok && review.NamesCluster(r.Text)
	})
}

// repeated returns the rows of each study that gives more than one pooled estimate.
func (o *Outcome) repeated() [][]int {
	var groups [][]int
	for i, c := range clustersOf(o.Studies) {
		for c >= len(groups) {
			groups = append(groups, nil)
		}
		groups[c] = append(groups[c], i)
	}
	return slices.DeleteFunc(groups, func(g []int) bool { return len(g) < 2 })
}

// dependent reports that the outcome was pooled with dependence, for what takes
// every estimate for a study of its own.
func (o *Outcome) dependent() bool { return o.Analysis.Dependence != dependence.Independent }

// onlyIndependent says that a part is for independent studies.
func (o *Outcome) onlyIndependent(what string) string {
	return fmt.Sprintf("%s takes every estimate for a study of its own, and several are from one study (%s %s): use pool and its forest chart, or keep one estimate for each study", what, review.SettingDependence, o.Analysis.Dependence)
}

// repeats reports several estimates from one study that were pooled as if each were
// a study of its own (D5).
func (e *examination) repeats() {
	if e.o.dependent() {
		return
	}
	groups := e.o.repeated()
	if len(groups) == 0 {
		return
	}
	const most = 3
	var names []string
	rows := 0
	for i, g := range groups {
		rows += len(g)
		if i < most {
			first := e.o.Studies[g[0]].Source
			names = append(names, fmt.Sprintf("%s and %d more", first.Name, len(g)-1))
		}
	}
	if len(groups) > most {
		names = append(names, "…")
	}
	e.find(review.Warning, "D5", fmt.Sprintf("%d of the %d estimates are from %s (%s), and are pooled as if each were a study of its own, which makes the result look too sure: pool them with --dependence three-level or robust, or keep one for each study",
		rows, len(e.o.Studies), map[bool]string{true: "a study that gives several", false: fmt.Sprintf("%d studies that give several", len(groups))}[len(groups) == 1], strings.Join(names, "; ")))
}

// DependenceDocument says how several estimates from one study were allowed for;
// the variances are absent unless there are three levels.
type DependenceDocument struct {
	Way     string   `json:"way"`
	Studies int      `json:"studies"`
	Largest int      `json:"most_from_one_study"`
	Between *float64 `json:"tau2_between_studies,omitempty"`
	Within  *float64 `json:"tau2_within_studies,omitempty"`
}

func dependenceDocument(c *meta.Clustered) *DependenceDocument {
	if c == nil {
		return nil
	}
	d := &DependenceDocument{Way: c.Way, Studies: c.Clusters, Largest: c.Largest}
	if c.Way == dependence.ThreeLevel.String() {
		d.Between, d.Within = &c.Between, &c.Within
	}
	return d
}
