// Package ledger keeps the record of a living review: every state that the review
// has had, in a folder that a team keeps in version control or on a shared drive.
// Nothing that was written is written anew.
//
// # The folder
//
//	steelyard.ledger      the ledger: text, one line for each state
//	sheets/HASH.csv       the input sheets and plans, named by the SHA-256 of their bytes
//	.gitattributes        keeps version control from changing bytes; lets a merge keep the lines of both sides
//	.gitignore            names what is only of this machine
//	steelyard.lock        held by the process that writes; its text says who that is
//	steelyard.ledger.torn-1   a line that was never finished, set aside
//
// No file holds a path, so that the folder may be moved.
//
// # The ledger, format 1
//
// The first line is "steelyard-ledger 1": the format and its version. A program
// refuses a version that is newer than its own. Each further line is a state:
//
//	CHECKSUM PARENT RECORD STUDIES
//
// in UTF-8, parted by single tabs, ended by LF or CRLF.
//
//   - PARENT is the CHECKSUM of the state before, 64 hexadecimal digits; of the first
//     state it is 64 zeros.
//   - RECORD is a JSON object without line ends; see [Record].
//   - STUDIES is a JSON list with an entry for each result of the record: the list of
//     its pooled studies, each as ["name", estimate, standard error, weight], with "id"
//     as a fifth where the sheet has one.
//   - CHECKSUM is the SHA-256, in lower-case hexadecimal digits, of all that follows
//     the first tab, the line end apart.
//
// The number of a state is that of its line less one. Two states with one parent
// are a fork: two people have updated apart from each other, and version control or
// a shared drive has brought both lines together. Both are kept; the next state
// follows the last line, and its record names the other ends in "joins".
//
// A line is written with one call and made durable before the update is
// acknowledged. A last line that has no line end and no right checksum was never
// acknowledged; the next update sets it aside in a file of its own.
//
// The chain finds accidents: a byte changed on the way, a line lost between others,
// an edit by hand. It does not find forgery, as whoever can write to the folder can
// compute new checksums, nor the loss of the newest lines; a copy elsewhere, such as
// the history of version control, does.
package ledger

// AccidentsOnly says what the checksums can find and what not.
const AccidentsOnly = "The checksums find accidents, not forgery: whoever can write to the folder can compute new ones, and the loss of the newest lines leaves no trace in it. The history of version control, or a copy elsewhere, guards against both."
