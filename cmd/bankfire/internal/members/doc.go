// Package members writes a long table row by row, in memory that does not grow with it:
// as CSV for people and small programs, or as Parquet for the others. Equal rows make
// equal bytes.
package members
