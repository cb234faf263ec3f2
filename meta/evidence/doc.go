// Package evidence weighs a hypothesis of an effect (H1) against one of none
// (H0): the empirical Bayes factor in its forms, the scale of steps and words,
// and the way from prior to posterior.
//
// A Ratio says how many times better H1 explains the data than H0 does. Where
// two regions are compared it is the first over the second. Everything is
// carried as a natural logarithm to the end, so that a ratio stays right at 20,000
// standard errors.
//
// The ratios are not likelihood ratios of fixed hypotheses: ratios of parts of
// the data must not be multiplied, but the whole analysed anew; and they must
// not be averaged, since their mean under H0 is infinite.
//
// Functions that return a Ratio for one statistic take valid input: a NaN, or
// degrees of freedom that are not positive, gives a ratio that holds NaN. Those
// that take an estimate and regions return an error.
//
// Source of the measure: Dudbridge (2024), PLoS ONE 19(2):e0297874; of the
// posterior Bayes factor under it: Aitkin (1991), Journal of the Royal
// Statistical Society B 53:111-142.
package evidence
