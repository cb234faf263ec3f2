// Package words turns numbers and results into what a reader reads: one function
// for each rule, so that text, charts and page say the same number in the same
// form.
package words
