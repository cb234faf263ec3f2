// Package missing asks whether small studies show other effects than large ones,
// and what the pooled effect would be if studies or results were missing for what
// they show: tests of asymmetry, and estimates that adjust for it. Each rests on
// an assumption that the data cannot confirm; Method.Assumption says it.
package missing
