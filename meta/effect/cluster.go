package effect

import "math"

// DesignEffect returns the factor by which randomising clusters rather than
// people multiplies a variance, 1 + (m−1)·ICC, m the mean number of people per
// cluster and ICC their intracluster correlation. It returns an *InputError
// unless m is finite and at least 1 and 0 ≤ ICC ≤ 1.
//
// Source: Cochrane Handbook 23.1.4.
func DesignEffect(clusterSize, icc float64) (float64, Conversion, error) {
	if err := checkFinite("cluster size", clusterSize); err != nil {
		return 0, Conversion{}, err
	}
	if clusterSize < 1 {
		return 0, Conversion{}, &InputError{What: "cluster size", Value: clusterSize, Why: "is below 1", Do: "enter the mean number of people per cluster"}
	}
	if !(icc >= 0 && icc <= 1) {
		return 0, Conversion{}, &InputError{What: "icc", Value: icc, Why: "is not between 0 and 1", Do: "enter the intracluster correlation, such as 0.05"}
	}
	effect := 1 + (clusterSize-1)*icc
	return effect, Conversion{
		What: "design effect of cluster randomisation",
		From: []Value{{"cluster size", clusterSize}, {"icc", icc}},
		To:   []Value{{"design effect", effect}}, Source: "Cochrane Handbook 23.1.4",
	}, nil
}

func checkDesignEffect(x float64) error {
	if err := checkFinite("design effect", x); err != nil {
		return err
	}
	if x < 1 {
		return &InputError{What: "design effect", Value: x, Why: "is below 1", Do: "enter 1 + (cluster size - 1) times icc"}
	}
	return nil
}

// ClusterTable divides events and totals of both arms by a design effect. It
// returns an *InputError for a table that fails Check and for a design effect
// that is not finite or below 1.
//
// Source: Cochrane Handbook 23.1.4.
func ClusterTable(t Table, designEffect float64) (EffectiveTable, Conversion, error) {
	if err := t.Check(); err != nil {
		return EffectiveTable{}, Conversion{}, err
	}
	if err := checkDesignEffect(designEffect); err != nil {
		return EffectiveTable{}, Conversion{}, err
	}
	out := Table{
		Events1: t.Events1 / designEffect, Total1: t.Total1 / designEffect,
		Events2: t.Events2 / designEffect, Total2: t.Total2 / designEffect,
	}
	return EffectiveTable{out}, Conversion{
		What: "effective counts of a cluster trial",
		From: append(t.values(), Value{"design effect", designEffect}),
		To:   out.values(), Source: "Cochrane Handbook 23.1.4",
	}, nil
}

// ClusterArm divides the number of people of an arm by a design effect; mean and
// standard deviation stay. It returns an *InputError for an arm that fails
// Check, for a design effect that is not finite or below 1, and where fewer than
// two people would be left.
//
// Source: Cochrane Handbook 23.1.4.
func ClusterArm(a Arm, designEffect float64) (Arm, Conversion, error) {
	if err := a.Check(); err != nil {
		return Arm{}, Conversion{}, err
	}
	if err := checkDesignEffect(designEffect); err != nil {
		return Arm{}, Conversion{}, err
	}
	out := Arm{Mean: a.Mean, SD: a.SD, N: a.N / designEffect}
	if out.N < 2 {
		return Arm{}, Conversion{}, &InputError{What: "total", Value: out.N, Why: "is below 2 after the adjustment for clusters", Do: "check cluster size and icc"}
	}
	return out, Conversion{
		What: "effective number of people of a cluster trial",
		From: []Value{{"total", a.N}, {"design effect", designEffect}},
		To:   []Value{{"total", out.N}}, Source: "Cochrane Handbook 23.1.4",
	}, nil
}

// ClusterSE multiplies a standard error that ignores the clusters by the square
// root of a design effect. It returns an *InputError unless se is finite and
// above 0 and the design effect is finite and at least 1.
//
// Source: Cochrane Handbook 23.1.4.
func ClusterSE(se, designEffect float64) (float64, Conversion, error) {
	if err := checkSE(se); err != nil {
		return 0, Conversion{}, err
	}
	if err := checkDesignEffect(designEffect); err != nil {
		return 0, Conversion{}, err
	}
	out := se * math.Sqrt(designEffect)
	if err := checkFinite("se", out); err != nil {
		return 0, Conversion{}, err
	}
	return out, Conversion{
		What: "standard error adjusted for cluster randomisation",
		From: []Value{{"se", se}, {"design effect", designEffect}},
		To:   []Value{{"se", out}}, Source: "Cochrane Handbook 23.1.4",
	}, nil
}
