package synthesis

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/sparse"
)

// Format names the version of the JSON.
const Format = "steelyard/1"

// Document returns the synthesis as its JSON structure; version is the
// program's.
func (s *Synthesis) Document(version string) Document {
	d := Document{
		Format:   Format,
		Program:  ProgramDocument{Version: version},
		Source:   SourceDocument{File: s.Source.File, Sheet: s.Source.Sheet, SHA256: s.Source.SHA256},
		Plan:     planDocument(s.Plan, ""),
		Findings: FindingDocuments(s.Findings),
		Cautions: s.Cautions,
		Outcomes: []OutcomeDocument{},
	}
	for i := range s.Readings {
		r := &s.Readings[i]
		d.Findings[r.Finding].Readings = append(d.Findings[r.Finding].Readings, r.document())
	}
	for i := range s.Outcomes {
		d.Outcomes = append(d.Outcomes, s.Outcomes[i].document(s.Plan))
	}
	return d
}

func planDocument(plan *review.Plan, outcome string) map[string]PlanDocument {
	all := map[string]PlanDocument{}
	for _, setting := range review.Settings() {
		v := plan.Value(setting.Name, outcome)
		if v.Text != "" && !(setting.Needs == review.Living && v.From == review.FromDefault) {
			all[setting.Name] = PlanDocument{Value: v.Text, From: v.From.String(), Cell: v.Place.String(), Reason: v.Reason, Date: v.Date.String()}
		}
	}
	return all
}

// FindingDocuments returns findings as they stand in the JSON.
func FindingDocuments(findings []review.Finding) []FindingDocument {
	all := []FindingDocument{}
	for _, f := range findings {
		all = append(all, FindingDocument{
			Severity: f.Severity.String(), Rule: f.Rule, Sheet: f.Place.Sheet, Cell: f.Place.Cell(),
			Study: f.Study, Outcome: f.Outcome, Message: f.Message, Accepted: f.Accepted,
		})
	}
	return all
}

func (o *Outcome) document(plan *review.Plan) OutcomeDocument {
	d := OutcomeDocument{
		Outcome: o.Name, K: len(o.Studies), Rows: o.Counts.Rows,
		Participants: o.Counts.Participants, Events: o.Counts.Events,
		Problem: o.Problem, Notes: o.Notes, Better: o.Analysis.Better.String(),
		Excluded: []ExcludedDocument{}, Conversions: []ConversionDocument{}, Studies: []StudyDocument{},
	}
	for _, e := range o.Excluded {
		d.Excluded = append(d.Excluded, ExcludedDocument{Study: e.Study, Cell: firstCell(e.Place), Rule: e.Rule, Reason: e.Reason})
	}
	d.POnly, d.PartsDocument = o.PValues.document(), o.Parts.document(o)
	d.Distribution = o.posteriorDocument()
	d.Explain = o.explainDocument()
	if len(o.Silent) > 0 {
		d.Silent = &SilentDocument{Studies: len(o.Silent), Participants: o.Counts.Silent}
	}
	if o.Result == nil {
		return d
	}
	d.Measure, d.Scale = o.Analysis.Measure.String(), scaleName(o.Analysis.Measure)
	for _, study := range o.Studies {
		d.Conversions = append(d.Conversions, conversionDocuments(study)...)
		entry := StudyDocument{
			Study: study.Source.Name, Date: study.Source.Date.String(),
			Estimate: study.Estimate.Y, SE: study.Estimate.SE,
			Low: study.Interval.Low, High: study.Interval.High,
			Weight: study.Weight, Place: firstCell(study.Source.Row),
			Basis: study.Basis.String(), Converted: study.Converted(), Assumptions: study.Assumptions,
		}
		if !o.Analysis.NullMissing {
			ln := study.Evidence.Ln()
			entry.LnEvidence = &ln
		}
		d.Studies = append(d.Studies, entry)
	}
	d.ResultDocument = o.resultDocument(plan)
	return d
}

func (p *Parts) document(o *Outcome) PartsDocument {
	d := PartsDocument{Methods: p.Methods.document(), Beliefs: p.Beliefs.document(), SmallStudy: p.SmallStudy.document(o.Analysis.NullMissing), Panel: p.Panel.document(o)}
	for i := range p.Runs {
		d.Runs = append(d.Runs, p.Runs[i].document())
	}
	return d
}

// scaleName names the scale on which a measure is analysed.
func scaleName(m effect.Measure) string {
	switch m {
	case effect.Correlation:
		return "fisher-z"
	case effect.Proportion:
		return "logit"
	case effect.ArcsineProportion, effect.DoubleArcsineProportion, effect.ArcsineDifference:
		return "arcsine"
	}
	if m.Log() {
		return "log"
	}
	return "linear"
}

// document returns a reading's answer; where there is none it says why.
func (r *ReadingEffect) document() ReadingDocument {
	d := ReadingDocument{Label: r.Label, Outcome: r.Outcome.Name, Problem: r.Outcome.Problem}
	if r.Outcome.Result != nil {
		d.SubsetDocument = subsetDocument(r.Outcome.Result.Fit, r.Outcome.Analysis.NullMissing)
	}
	return d
}

func subsetDocument(fit *meta.Fit, nullMissing bool) *SubsetDocument {
	if fit == nil {
		return nil
	}
	m := fit.Mean
	d := &SubsetDocument{K: m.K, Estimate: m.Estimate, SE: m.SE, Low: m.Low, High: m.High}
	if !nullMissing {
		weighed := evidenceDocument(m.Evidence)
		d.EvidenceDocument = &weighed
	}
	return d
}

// document returns the studies known by a p-value; nil if there is none.
func (p *PValues) document() *POnlyDocument {
	if p == nil {
		return nil
	}
	d := &POnlyDocument{Stouffer: p.Stouffer.document(), Fisher: p.Fisher.document()}
	for _, s := range p.Studies {
		d.Studies = append(d.Studies, POnlyStudyDocument{
			Study: s.Source.Name, Place: firstCell(s.Source.Row), Participants: s.N, Z: s.Z, LnEvidence: s.Evidence.Ln(),
			Conversion: conversionDocument(s.Conversion, s.Source),
		})
	}
	return d
}

func (c Combined) document() CombinedDocument {
	return CombinedDocument{Z: c.Z, P: math.Exp(c.LnP), LnP: c.LnP, EvidenceDocument: evidenceDocument(c.Evidence)}
}

// firstCell names a row by its first cell, such as "Sheet1!A2".
func firstCell(row review.Place) string {
	row.Col = max(row.Col, 1)
	return row.String()
}

func conversionDocuments(study Study) []ConversionDocument {
	var all []ConversionDocument
	for _, c := range study.Conversions {
		all = append(all, conversionDocument(c, study.Source))
	}
	return all
}

func conversionDocument(c effect.Conversion, row *review.Study) ConversionDocument {
	return ConversionDocument{
		Study: row.Name, What: c.What, Source: c.Source,
		From: namedValues(c.From, row), To: namedValues(c.To, nil),
	}
}

// namedValues names numbers by their cell where the row holds them as they are,
// under the number's name or under that of its form on the analysis scale.
// Infinite degrees of freedom, which stand for the normal law, are absent.
func namedValues(values []effect.Value, row *review.Study) map[string]float64 {
	named := make(map[string]float64, len(values))
	for _, v := range values {
		if math.IsInf(v.Value, 0) {
			continue
		}
		name := v.Name
		titles := []string{v.Name, "analysis " + v.Name}
		if row == nil {
			titles = nil
		}
		for _, title := range titles {
			field, err := review.ParseField(title)
			if err != nil {
				continue
			}
			if n, ok := row.Number(field); ok && n.Value == v.Value {
				name = n.Place.Cell()
			}
		}
		named[name] = v.Value
	}
	return named
}

func (o *Outcome) resultDocument(plan *review.Plan) *ResultDocument {
	r, fit := o.Result, o.Result.Fit
	d := &ResultDocument{Pooled: o.pooledDocument(fit), Without: subsetDocument(r.Without, o.Analysis.NullMissing), Integrated: integratedDocument(r.Integrated, (*bayes.Integrated).Effect)}
	if !o.Analysis.NullMissing {
		d.Doubter = &DoubterDocument{Level: r.DoubtersPrior.Posterior, Prior: r.DoubtersPrior.Prior}
	}
	if own := planDocument(plan, o.Name); o.Name != "" {
		d.Plan = own
	}
	if r.Other != nil {
		other := o.pooledDocument(r.Other)
		d.Other = &other
	}
	if fit.Mean.K > 1 {
		if fit.Model.Effects == meta.RandomEffects {
			d.Tau = &TauDocument{Tau2: fit.Mean.Tau2, Low: fit.Tau2.Low, High: finite(fit.Tau2.High)}
		}
		if d.Heterogeneity = heterogeneityDocument(fit); d.Heterogeneity != nil {
			d.Heterogeneity.Integrated = integratedDocument(r.Differing, (*bayes.Integrated).Heterogeneity)
		}
	}
	if p := fit.Prediction; p != nil {
		d.Prediction = &PredictionDocument{Low: p.Low, High: p.High, DF: finite(p.DF), Method: p.Method.String(), Widened: p.Widened}
	}
	for _, b := range r.Posterior {
		d.Posterior = append(d.Posterior, PosteriorDocument(b))
	}
	for _, region := range r.Regions {
		d.Regions = append(d.Regions, region.document())
	}
	for _, c := range fit.Caveats {
		d.Caveats = append(d.Caveats, c.Text())
	}
	d.AccrualDocument = o.accrualDocument()
	return d
}

func (r Region) document() RegionDocument {
	d := RegionDocument{
		Name: r.Name, Low: finite(r.Low), High: finite(r.High), LnM: r.LnM, Posterior: r.Posterior,
		EvidenceDocument: evidenceDocument(r.Evidence),
	}
	if r.Settings >= 0 {
		d.Settings = &r.Settings
	}
	return d
}

// heterogeneityDocument is nil where fewer than two tables can differ.
func heterogeneityDocument(fit *meta.Fit) *HeterogeneityDocument {
	h := fit.Heterogeneity
	if h.DF < 1 {
		return nil
	}
	d := &HeterogeneityDocument{
		Q: h.Q, DF: h.DF, P: math.Exp(h.LnP),
		I2Q: ShareDocument(h.I2Q), H2: h.H2, EvidenceDocument: evidenceDocument(h.Evidence),
	}
	if fit.Method != "" {
		d.Statistic = scatterName(fit)
		return d
	}
	share := ShareDocument(h.I2Tau)
	d.I2Tau, d.H2Tau = &share, &h.H2Tau
	return d
}

func (o *Outcome) pooledDocument(fit *meta.Fit) PooledDocument {
	m := fit.Mean
	d := PooledDocument{
		Effects: fit.Model.Effects.String(), Method: o.Analysis.Method.String(),
		Interval: intervalName(fit), Level: fit.Model.Level, Null: &fit.Model.Null,
		MeanDocument: meanDocument(m),
		EvidenceFormDocument: &EvidenceFormDocument{
			Evidence: o.FormOf(fit).String(), EvidenceDocument: evidenceDocument(m.Evidence), Priors: o.priorsDocument(fit),
			Word: m.Evidence.Word().String(), Favours: m.Evidence.Favours().String(),
		},
		Display: DisplayDocument{
			Estimate: finite(effect.ToReader(o.Analysis.Measure, m.Estimate)),
			Low:      finite(effect.ToReader(o.Analysis.Measure, m.Low)),
			High:     finite(effect.ToReader(o.Analysis.Measure, m.High)),
			Unit:     o.Analysis.Measure.String(),
		},
	}
	if fit.Model.Effects == meta.RandomEffects {
		d.Tau = fit.Model.Tau.String()
	}
	d.Dependence = dependenceDocument(fit.Clustered)
	if o.Analysis.NullMissing {
		d.Null, d.TestDocument, d.EvidenceFormDocument = nil, nil, nil
	}
	return d
}

// intervalName names the interval of a fit.
func intervalName(fit *meta.Fit) string {
	if fit.Clustered != nil {
		return "student-t"
	}
	if fit.Method == sparse.ConditionalExact.String() {
		return "exact"
	}
	return fit.Model.Interval.String()
}

func meanDocument(m meta.Mean) MeanDocument {
	return MeanDocument{
		Estimate: m.Estimate, SE: m.SE, DF: finite(m.DF), Low: m.Low, High: m.High,
		TestDocument: &TestDocument{Statistic: m.Statistic, P: math.Exp(m.LnP), LnP: m.LnP},
	}
}

func evidenceDocument(r evidence.Ratio) EvidenceDocument {
	return EvidenceDocument{LnEvidence: r.Ln(), Steps: r.Steps()}
}

// finite returns a pointer to x, or nil for an infinite one, which JSON leaves
// out.
func finite(x float64) *float64 {
	if math.IsInf(x, 0) {
		return nil
	}
	return &x
}
