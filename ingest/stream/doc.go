// Package stream reads a long text table, many rows for each of many sets, without
// ever holding more than a few blocks of it: the rows of a set stand together, and a
// block holds whole sets. It reads numbers and the name of the set, nothing else; the
// columns are recognised by the words that ingest knows.
package stream
