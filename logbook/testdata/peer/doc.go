// Package peer reads what barline wrote with programs that barline has nothing
// to do with. It is a module of its own because they are heavy. Run it as
//
//	barline log export DIR --format csv     -o out.csv
//	barline log export DIR --format parquet -o out.parquet
//	BARLINE_CSV=out.csv BARLINE_PARQUET=out.parquet go test ./...
//
// with absolute paths, in this folder.
package peer
