// Package letters brings texts to the normal forms of Unicode (Unicode Standard Annex 15).
// The tables for that are large: a browser has its own, which the engine of the report
// page uses.
package letters
