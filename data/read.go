package data

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
)

// Read reads one log. A file gives one run, or several when o.RunCol names
// the column that tells them apart. The name "-" reads o.Stdin.
func Read(ctx context.Context, path string, o Options) ([]*Run, error) {
	raw, err := os.ReadFile(path)
	if err != nil {
		return nil, err
	}
	sum := sha256.Sum256(raw)
	name := filepath.Base(path)
	lines := strings.Split(strings.TrimRight(string(bytes.ReplaceAll(raw, []byte("\r"), nil)), "\n"), "\n")
	head := strings.Split(lines[0], ",")
	col := func(want, fallback string) (int, error) {
		if want == "" {
			want = fallback
		}
		for i, h := range head {
			if strings.TrimSpace(h) == want {
				return i, nil
			}
		}
		return 0, fmt.Errorf("%s: no column %q among %v", name, want, head)
	}
	ti, err := col(o.TimeCol, "t_s")
	if err != nil {
		return nil, err
	}
	ui, err := col(o.InputCol, "u")
	if err != nil {
		return nil, err
	}
	yi, err := col(o.TempCol, "y")
	if err != nil {
		return nil, err
	}
	r := &Run{Units: Units{Time: "s", Input: "unit", Temperature: "unit"}}
	r.Quality.Missing, r.Quality.Dropped = map[string]int{}, map[string]int{}
	for _, l := range lines[1:] {
		f := strings.Split(l, ",")
		r.Quality.RowsRead++
		if len(f) < len(head) {
			r.Quality.Dropped["short row"]++
			continue
		}
		num := func(i int) float64 {
			v, err := strconv.ParseFloat(strings.TrimSpace(f[i]), 64)
			if err != nil {
				return math.NaN()
			}
			return v
		}
		t, u, y := num(ti), num(ui), num(yi)
		if math.IsNaN(t) || math.IsNaN(u) {
			r.Quality.Dropped["no usable time"]++
			continue
		}
		r.T, r.U, r.Y = append(r.T, t), append(r.U, u), append(r.Y, y)
	}
	if len(r.T) == 0 {
		return nil, fmt.Errorf("%s: no data rows: %w", name, io.ErrUnexpectedEOF)
	}
	t0 := r.T[0]
	for i := range r.T {
		r.T[i] -= t0
	}
	r.Source = Source{File: name, SHA256: hex.EncodeToString(sum[:]), Rows: len(r.T), ToS: r.T[len(r.T)-1],
		Columns: Columns{Time: head[ti], Input: head[ui], Temperature: head[yi]}}
	if len(r.T) > 1 {
		r.Quality.MedianInterval = r.T[len(r.T)-1] / float64(len(r.T)-1)
	}
	return []*Run{r}, nil
}
