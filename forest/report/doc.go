// Package report writes the results of a synthesis as one page of HTML that a panel
// can read, print and question: self-contained, without a request to anywhere, and
// whole without script.
//
// Every number on the page is the synthesis's own, written by package words; the
// script picks among texts and positions that stand in the page's data (see Data) and
// computes no statistic.
package report
