// Package result writes and reads result.json and pairs.csv, says where two
// results differ, holds the JSON Schema of the former (schema.json), and writes
// intensities and pairs as CSV and CIF.
//
// Numbers keep every digit. Not-a-number is written as null, an infinite
// interval end as "inf" or "-inf"; both come back as they were. The same result
// gives the same bytes; environment and timing, which differ from run to run,
// stand last.
//
// It computes nothing.
package result
