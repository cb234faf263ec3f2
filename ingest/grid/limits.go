package grid

import "time"

// Limits on what is read. They are far above any sheet of studies and low enough
// that a hostile file cannot take a gigabyte or ten seconds of a processor.
const (
	// MaxFileBytes is the size of a file as it lies on disk.
	MaxFileBytes = 100 << 20
	// MaxUnzippedBytes is the size of all parts of a workbook that are read,
	// unpacked. Parts that are not read, such as pictures, do not count.
	MaxUnzippedBytes = 256 << 20
	// MaxPartBytes is the size of one part of a workbook, unpacked.
	MaxPartBytes = 128 << 20
	// MaxRatio is how many times larger than packed a part may get, once it is
	// larger than RatioFreeBytes. Spreadsheets stay below 100.
	MaxRatio = 200
	// RatioFreeBytes is the unpacked size up to which MaxRatio is not asked.
	RatioFreeBytes = 8 << 20
	// MaxEntries is the number of entries of the workbook's package.
	MaxEntries = 10_000
	// MaxSheets is the number of sheets of a workbook.
	MaxSheets = 1_000
	// MaxRows is the highest row number, that of spreadsheet programs.
	MaxRows = 1_048_576
	// MaxColumns is the highest column that may hold a value.
	MaxColumns = 1_000
	// MaxWorkbookCells is the number of cells of all sheets of a workbook, gaps
	// between values included.
	MaxWorkbookCells = 5_000_000
	// MaxTextCells is the number of cells of a text file, gaps included.
	MaxTextCells = 10_500_000
	// MaxWorkbookText is the number of bytes of the texts of all cells, counted for
	// each cell that shows a text, since a file can show one text in millions of cells.
	MaxWorkbookText = 128 << 20
	// MaxNamespaces is the number of namespaces that may be declared at once in a part
	// of a workbook.
	MaxNamespaces = 100
	// MaxStrings is the number of entries of a workbook's string table.
	MaxStrings = 2_000_000
	// MaxStyles is the number of cell styles or number formats of a workbook.
	MaxStyles = 100_000
	// MaxFieldBytes is the length of one cell's text: 32,767 characters, the most
	// a spreadsheet program stores, of at most four bytes.
	MaxFieldBytes = 131_068
	// MaxMerges is the number of merged ranges of a sheet.
	MaxMerges = 100_000
	// MaxTime is how long reading may take. What the other limits let through takes
	// less than a third of it; a slow or busy computer shall read that too.
	MaxTime = 30 * time.Second
	// MaxNotes is the number of comments of a sheet.
	MaxNotes = 100_000
)
