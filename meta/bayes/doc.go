// Package bayes weighs evidence with prior distributions: evidence for an
// effect with the spread between studies integrated out, averages over models,
// the posterior of mean and spread, Bayes factors under a prior for the effect,
// and the scepticism limit. All of it is for comparison beside the primary
// measure of evidence, and everything is carried as a natural logarithm.
//
// Estimates y and standard errors s are on the analysis scale; τ, and the scale
// of a prior for it, has their unit. No function modifies or keeps its input.
package bayes
