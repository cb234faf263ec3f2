package ingest

// MemoryLimit is the soft limit of memory, in bytes, that a program should set (see
// runtime/debug.SetMemoryLimit) before it reads files from strangers: near it the
// garbage of reading is collected at once. What the limits of package grid let
// through then stays below a gigabyte.
const MemoryLimit = 800 << 20
