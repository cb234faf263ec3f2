// Package webpage writes the report page: one HTML file with its charts, data, style and
// script, which needs nothing else. The views say what each part shows, the render files
// write it; whatever comes from a sheet is escaped there.
package webpage
