// Package logbook keeps the record of a bench: it appends, recovers after a
// crash, checks, and reads back. Nothing in it edits and nothing deletes; a
// correction is a new record.
//
// # Concepts
//
// A logbook is a folder. A Book is a logbook open for appending, by one
// program at a time. Append puts a record into memory and returns; a goroutine
// of the Book's own brings records to the disk in groups; Sync waits for it.
// Records walks over what was written, Follow goes on as it grows, Verify
// checks everything. Readers need no lock and write nothing but the index.
//
// What it refuses: a second writer, a folder that cannot be written, data that
// is not a JSON object, records of more than 1 MiB, kinds that it writes
// itself. When the disk fails it never blocks its caller: records wait in
// bounded memory, the rest is refused and counted, and the count is written
// when the disk is back.
//
// # The folder
//
//	000001.jsonl       a segment; six digits or more, counted from 1
//	000001.jsonl.zst   the same, compressed after it was sealed
//	000001.index       where in the segment which times are; derived, may be deleted
//	000001.torn        bytes behind the last whole record, set aside after a crash
//	000001.torn.2      the same, from a later crash
//	*.part             a file that is not yet whole; may be deleted
//	lock               held with an advisory lock by the program that writes
//	spectra/           files that records name by the SHA-256 of their content
//
// Anything else is reported as foreign and left alone.
//
// # A line, format version 1
//
// A segment is UTF-8 text without byte-order mark. Each record is one line,
// ended by one LF (0x0A), and is one JSON object (RFC 8259) written without
// white space and with its members in this order:
//
//	{"seq":1042,"t":"2026-12-01T11:42:05.123456Z","mono_ns":123,"kind":"reading","data":{…},"crc":"9f3a01c2"}
//
//	seq      unsigned decimal below 2^64, one more than that of the record before it
//	t        bench time, RFC 3339, UTC, always six digits of second and a Z: 27 bytes
//	mono_ns  signed decimal, nanoseconds since the writing program began; never steps back
//	         between a start record and the next
//	kind     1 to 32 of a-z and underscore, beginning with a letter
//	data     a JSON object; what is in it depends on kind. A quantity has its SI unit in
//	         its name (value follows its role). What is not finite is null, with a reason
//	crc      eight lower-case hexadecimal digits
//
// A line is at most 1 MiB (1048576 bytes) long, LF included.
//
// crc is CRC-32C (Castagnoli polynomial, reflected, initial value and final
// inversion all ones, as in RFC 3720 B.4) over two pieces: the eight digits of
// the crc of the record before, as text; then all bytes of this line before
// the ,"crc":. The record before the first one of a logbook is taken to have
// crc 00000000. So an edit breaks its own line, and a line that was removed,
// added or moved breaks the next.
//
// # Segments
//
// The first line of a segment has kind segment. It stands outside the
// sequence: its seq repeats that of the last record before it (0 if there is
// none), its crc begins with 00000000, and the next record does not chain from
// it but from the record that after_crc quotes:
//
//	{"format":1,"segment":3,"after_seq":1041,"after_crc":"5b0e77d1","previous_sha256":"…"}
//
// format is the version of all this. previous_sha256 is the digest of the
// segment before, null if that was never sealed.
//
// The last line of a finished segment has kind seal. It stands outside the
// sequence too: its seq repeats that of the record before it, its crc chains
// from that record's. Nothing follows it.
//
//	{"records":1041,"bytes":160123,"sha256":"…"}
//
// records counts the lines between the segment line and the seal; bytes and
// sha256 (FIPS 180-4) are of everything before the seal line. A seal that was
// added by recovery has also "recovered":true and "torn_bytes", the length of
// what was set aside.
//
// A segment ends when it would grow beyond its size, when a later UTC day
// begins than that of its first record, when writing to it failed, and when the program ends. Numbers go up
// but may leave gaps. A segment without a seal is one that is being written,
// or whose writing was cut off.
//
// After a failed write, or a crash, a Book goes on in a new segment, behind the
// last record that is surely on the disk. What earlier segments hold beyond
// after_seq does not count: it stands again in the new segment, or was never
// acknowledged. Readers leave it out.
//
// # Kinds written by the logbook itself
//
//	segment  see above
//	seal     see above
//	lost     {"records":17,"readings":12,"from":"…","to":"…","reason":"…"}: records that
//	         were refused since the one before, with the t of the first and the last
//
// # Compressed segments
//
// A compressed segment is a sequence of independent Zstandard frames (RFC
// 8878), each of whole lines and at most 1 MiB of them. Decompressed as one
// stream, it is the segment, byte for byte; digests are of that.
package logbook
