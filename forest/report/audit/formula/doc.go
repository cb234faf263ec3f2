// Package formula evaluates the spreadsheet formulas that this program writes, so
// that the workbook can hold the value of each of its formulas at full precision and
// a formula that would not agree with the program's result is seen before it is
// written. It knows the part of the language that the workbook uses, and evaluates no
// formula of an input file.
package formula
