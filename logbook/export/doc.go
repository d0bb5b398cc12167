// Package export writes records of a logbook for other programs: CSV as of
// RFC 4180, Parquet, and a scan table with one row a step.
//
// Every quantity is in the SI unit that its column or the column "unit" names;
// every time is UTC, RFC 3339 with six digits of second. What a record does not
// have is an empty field in CSV and null in Parquet, never NaN.
package export
