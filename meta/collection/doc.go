// Package collection weighs each of many pooled sets against all of them: what is
// left of a p-value that is one of many, and what the spread of all statistics says
// of how many sets have an effect at all.
package collection
