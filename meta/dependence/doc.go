// Package dependence pools studies of which some give several estimates: by a
// model of three levels, or with a variance that needs no model of how the
// estimates of one study depend on each other.
package dependence
