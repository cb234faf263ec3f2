package synthesis

import (
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
)

// PValues are the studies of an outcome that give a p-value and no estimate. They
// are no part of the pooled result: their evidence stands by itself, and the
// ratios are not multiplied.
type PValues struct {
	Studies  []PValueStudy
	Stouffer Combined // of these studies alone, weighted by the root of their people
	Fisher   Combined
}

// PValueStudy is one study known by its p-value alone.
type PValueStudy struct {
	Source     *review.Study
	Z, N       float64 // z is above 0 if the effect lies higher
	Evidence   evidence.Ratio
	Conversion effect.Conversion
}

// Combined is what p-values say together, with the evidence of its z in the
// normal form.
type Combined struct {
	effect.Combined
	Evidence evidence.Ratio
}

// hasPValue reports whether a p-value comes with its direction and the number of
// people.
func (d *derivation) hasPValue() bool {
	return d.has(review.PValue) && d.remark(review.Direction) != "" && d.bothArms() > 0 && !d.hasEstimate()
}

// bothArms returns how many people a row's result is of.
func (d *derivation) bothArms() float64 {
	if d.has(review.TotalTreated, review.TotalControl) && !d.crossover() {
		return d.value(review.TotalTreated) + d.value(review.TotalControl)
	}
	return d.people()
}

// signedZ returns the z of the row's p-value with the sign of its direction.
func (d *derivation) signedZ() (float64, error) {
	direction, err := d.direction()
	if err != nil {
		return 0, err
	}
	convert := effect.SignedZ
	if d.value(review.PSides) == 1 {
		convert = effect.SignedZOneSided
	}
	z, step, err := convert(d.value(review.PValue), direction)
	if err == nil {
		d.log(step)
	}
	return z, err
}

// addPValue takes a row into the evidence of p-values alone.
func (o *Outcome) addPValue(d *derivation) error {
	z, err := d.signedZ()
	if err != nil {
		return err
	}
	if o.PValues == nil {
		o.PValues = &PValues{}
	}
	o.PValues.Studies = append(o.PValues.Studies, PValueStudy{
		Source: d.row, Z: z, N: d.bothArms(), Evidence: evidence.Normal(z), Conversion: d.steps[len(d.steps)-1],
	})
	return nil
}

// combine combines the p-values by Stouffer's and by Fisher's method.
func (p *PValues) combine() error {
	if p == nil {
		return nil
	}
	var signed []effect.Signed
	for _, s := range p.Studies {
		signed = append(signed, effect.Signed{Z: s.Z, N: s.N})
	}
	var err error
	if p.Stouffer.Combined, _, err = effect.Stouffer(signed); err != nil {
		return err
	}
	if p.Fisher.Combined, _, err = effect.Fisher(signed); err != nil {
		return err
	}
	p.Stouffer.Evidence, p.Fisher.Evidence = evidence.Normal(p.Stouffer.Z), evidence.Normal(p.Fisher.Z)
	return nil
}
