// Package journal keeps the results of a long computation in a file, record by record, so
// that one which is broken off, however it ends, can go on from where it was.
//
// Create begins a journal, Resume goes on with one, and Append adds a record; Read reads
// the records one after the other in memory that does not grow. What a record holds is
// not the package's business. The file is a line that names the format, a header that
// says whose records these are, and the records, each with its number and a checksum:
//
//	bankfire journal 1\n
//	length (4 bytes)  header (JSON)  checksum (4)
//	number (8)  length (4)  record  checksum (4)
//	...
//
// Numbers are little-endian. A checksum is the CRC-32C of all that stands before it, from
// the line on for the header, and for a record from the header's checksum on, so that a
// record of another journal is none of this one. Records are numbered in order, without
// gaps.
package journal
