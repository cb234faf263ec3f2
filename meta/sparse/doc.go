// Package sparse pools 2×2 tables by models of the counts themselves, so that no
// table needs an invented half event:
//
//   - MantelHaenszel: a common odds ratio, risk ratio or risk difference;
//   - Peto: a common odds ratio from observed minus expected events;
//   - ConditionalExact: a common odds ratio from the non-central hypergeometric
//     laws of the tables given their margins, with exact limits;
//   - BinomialNormal: binomial arms, an intercept for each study and a normal
//     law of the log odds ratios; with a common effect the logistic model.
//
// A method is a value, Model. Fit returns all that belongs to a result; Refit
// the mean alone, for whatever pools many sets of tables one after another.
//
// All estimates are on the analysis scale: natural logarithms of ratios.
//
// A table in which nobody had the event, or everybody had, carries nothing about
// an odds ratio; about a risk ratio only the former does not. Such tables enter
// no sum and change no digit; they are counted and listed in Tally. A risk
// difference of 0 among people without events is an estimate like another: for
// that measure every table counts.
package sparse
