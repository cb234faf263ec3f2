// Package explain asks why studies differ: it compares subgroups and regresses the
// studies' effects on their covariates. It knows estimates with standard errors on
// the analysis scale, and the covariates' cells as the sheet has them.
//
// What it finds is observational: it compares studies, not people, even where each
// study was randomised.
package explain
