// Package numeric holds the numerical ground that the statistics stand on:
// tails and logs of tails that keep their digits however far out, their
// inverses, a bracketed root and minimum, adaptive quadrature, and sums that
// lose nothing.
//
// Every scalar function is guarded: invalid input (NaN, degrees of freedom that
// are not positive, a probability outside 0 to 1) gives NaN, never a panic.
// Callers validate before they call. An infinite number of degrees of freedom
// is valid wherever the limit exists.
package numeric
