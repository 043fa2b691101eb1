// Package result writes and reads result.json, writes pairs.csv, and holds the
// JSON Schema of the former.
//
// Numbers keep every digit. Not-a-number is written as null, an infinite
// interval end as "inf" or "-inf"; both come back as they were. The same result
// gives the same bytes; environment and timing, which differ from run to run,
// stand last.
//
// It computes nothing.
package result
