// Package evidence weighs a hypothesis of an effect (H1) against one of none
// (H0): the empirical Bayes factor in its forms, the scale of steps and words,
// and the way from prior to posterior.
//
// Everything is carried as a natural logarithm to the end.
package evidence
