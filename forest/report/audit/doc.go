// Package audit writes the audit workbook: the way from the numbers of the sheet to
// the pooled answer as formulas that an auditor can follow and change. Every formula
// is evaluated as it is written; where its value would not agree with the program's,
// the program's own value stands in the cell instead, marked as entered.
package audit
