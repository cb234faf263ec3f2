package meta_test

import (
	"fmt"

	"steelyard/meta"
)

// Three studies with standard error 1 and estimates 0, 2, 4. By hand: the sample
// variance is 4, less the sampling variance 1 leaves τ² = 3; the mean is 2 with
// se √((1+3)/3) = 1.155; Q = 8 on 2 degrees of freedom.
func ExampleModel_Fit() {
	model := meta.Model{Level: 0.95}
	fit, err := model.Fit([]float64{0, 2, 4}, []float64{1, 1, 1})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("mean %.3f, se %.3f, τ² %.3f\n", fit.Mean.Estimate, fit.Mean.SE, fit.Mean.Tau2)
	fmt.Printf("Q %.1f on %d df, I² %.2f\n", fit.Heterogeneity.Q, fit.Heterogeneity.DF, fit.Heterogeneity.I2Q.Value)
	fmt.Printf("%v, %v\n", fit.Model.Tau, fit.Model.Interval)
	for _, caveat := range fit.Caveats {
		fmt.Println(caveat.Text())
	}
	// Output:
	// mean 2.000, se 1.155, τ² 3.000
	// Q 8.0 on 2 df, I² 0.75
	// restricted-ml, hartung-knapp-floor
	// 3 studies tell little about the spread between studies.
}

// A common effect of three studies: the weights are 1/s², here 4, 1 and 1, so that
// the mean is (4·1 + 1·4 + 1·4)/6 = 2 with se 1/√6.
func ExamplePooler_Pool() {
	var pooler meta.Pooler
	mean, err := pooler.Pool(meta.Model{Level: 0.95, Effects: meta.CommonEffect},
		[]float64{1, 4, 4}, []float64{0.5, 1, 1})
	fmt.Printf("%.3f (%.3f to %.3f), z = %.2f, %v\n", mean.Estimate, mean.Low, mean.High, mean.Statistic, err)
	// Output: 2.000 (1.200 to 2.800), z = 4.90, <nil>
}

func ExampleModel_Resolve() {
	model, err := meta.Model{Level: 0.95, Interval: meta.ProfileLikelihood}.Resolve(10)
	fmt.Println(model.Tau, err)
	_, err = meta.Model{Level: 0.95, Interval: meta.HenmiCopas, Tau: meta.PauleMandel}.Resolve(10)
	fmt.Println(err)
	// Output:
	// maximum-likelihood <nil>
	// the interval henmi-copas rests on its own estimate of τ², dersimonian-laird, not paule-mandel: leave the estimator unset, or use hartung-knapp-floor
}

func ExampleInputError() {
	_, err := meta.Model{Level: 0.95}.Fit([]float64{1, 2}, []float64{0.3, 0})
	fmt.Println(err)
	// Output: study 2 in the order given: the standard error 0 is not above 0: correct it or leave the study out
}

func ExampleMean_Location() {
	mean, err := new(meta.Pooler).Pool(meta.Model{Level: 0.95, Effects: meta.CommonEffect}, []float64{1, 3}, []float64{1, 1})
	location := mean.Location()
	fmt.Printf("%.1f, se %.4f, %v\n", location.Estimate, location.SE, err)
	// Output: 2.0, se 0.7071, <nil>
}
