// Package report lists the files of a report besides its page: every chart in the forms
// that papers and slides take. The page is package webpage's, the workbooks are those of
// the rooms below.
package report
