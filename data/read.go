package data

import (
	"bytes"
	"context"
	"errors"
	"fmt"
)

// Read reads one log: CSV and its cousins or Parquet, packed with gzip or
// zstd or not; the name "-" reads o.Stdin. A file gives one run, or several,
// in the order in which they begin in the file, when o.RunCol names the
// column that tells them apart.
//
// What can be recognised in the file is recognised. What is ambiguous is an
// error that lists the candidates and names the flag that settles it. Errors
// begin with the path, and with the line where it is known.
func Read(ctx context.Context, path string, o Options) ([]*Run, error) {
	s, err := openSource(path, o.Stdin)
	if err != nil {
		return nil, err
	}
	defer s.close()
	tables, info, err := readTables(ctx, s, &o)
	if err != nil {
		return nil, err
	}
	sum, err := s.sum()
	if err != nil {
		return nil, err
	}
	var runs []*Run
	for i, tb := range tables {
		run, err := finish(path, tb, info, &o)
		if err != nil {
			return nil, err
		}
		tables[i] = nil
		run.Source.File, run.Source.SHA256 = s.file, sum
		runs = append(runs, run)
	}
	if len(runs) == 0 {
		return nil, fmt.Errorf("%s: %w", path, errNoRows)
	}
	return runs, nil
}

func readTables(ctx context.Context, s *source, o *Options) ([]*table, *reading, error) {
	if len(s.head) == 0 {
		return nil, nil, fmt.Errorf("%s: %w", s.path, errEmpty)
	}
	if use := ownFile(s.head); use != "" {
		return nil, nil, fmt.Errorf("%s: %s", s.path, use)
	}
	if isMarkup(s.head) {
		return nil, nil, fmt.Errorf("%s: is a page of HTML or XML, whatever its name says, not a log: open it in a spreadsheet and save it as CSV", s.path)
	}
	if bytes.HasPrefix(s.head, []byte("PAR1")) {
		return readParquet(ctx, s, o)
	}
	return readText(ctx, s, o)
}

var errEmpty = errors.New("the file is empty")
