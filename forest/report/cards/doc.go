// Package cards writes the panel's cards of a synthesis as a workbook.
package cards
