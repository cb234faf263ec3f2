// Package accrual asks what repeated looks at a growing review can show by chance
// alone, and what one more trial could change.
//
// Effects, standard errors and τ are on the analysis scale. Simulations take a
// context and report progress, and are the same for a seed whatever the number of
// workers. No function modifies or keeps its input.
package accrual
