package data

import "bytes"

// findPoint decides between decimal point and comma. A mark that is not
// followed by exactly three digits cannot be a thousands mark. Where all marks
// are followed by three, they are decimal marks if every number of the column
// has one, since a logger prints a fixed number of decimals, and thousands
// marks beside whole numbers without: guess is then such a number. Between
// commas a point is no thousands mark where no cell has a decimal comma.
func findPoint(lines []line, delim byte, fields int) (point byte, guess []byte) {
	var decimal [2]int              // cells whose mark can only be a decimal one
	loose := make([][2]int, fields) // by column, cells whose mark could be either
	whole := make([]int, fields)    // cells without a mark
	commas := false
	examples := make([][]byte, fields)
	for _, l := range lines {
		if len(l.cells) != fields {
			continue
		}
		for i, c := range l.cells {
			if looseClass(c) != numbers {
				how := usualSpelling
				if c, how = respell(c); how == usualSpelling || looseClass(c) != numbers {
					continue
				}
			}
			if _, stamp := compactStamp(c); stamp {
				continue
			}
			commas = commas || bytes.IndexByte(c, ',') >= 0
			switch k, sure := markOf(c); {
			case k < 0:
				whole[i]++
			case sure:
				decimal[k]++
			default:
				loose[i][k]++
				examples[i] = c
			}
		}
	}
	if decimal[0]+decimal[1] == 0 {
		for i, n := range loose {
			for k := range n {
				if n[k] > 0 && (whole[i] == 0 || delim == ',' && !commas) {
					decimal[k] += n[k]
				} else if n[k] > 0 {
					decimal[1-k] += n[k]
					guess = examples[i]
				}
			}
		}
	}
	point = '.'
	if decimal[1] > decimal[0] {
		point = ','
	}
	if k, _ := markOf(guess); k < 0 || ".,"[k] == point { // other columns had it that the mark is a decimal one
		guess = nil
	}
	return point, guess
}

// markOf finds the mark that stands last in a number: 0 a point, 1 a comma, -1
// none or one that comes more than once. sure tells that it can only be a
// decimal mark.
func markOf(c []byte) (k int, sure bool) {
	i, j := bytes.LastIndexByte(c, '.'), bytes.LastIndexByte(c, ',')
	at, other := i, byte(',')
	if j > i {
		k, at, other = 1, j, '.'
	}
	if at < 0 || bytes.Count(c, c[at:at+1]) > 1 {
		return -1, false
	}
	digits := 0
	for _, x := range c[at+1:] {
		if x-'0' > 9 {
			break
		}
		digits++
	}
	whole := bytes.TrimLeft(c[:at], "+-")
	return k, digits != 3 || len(whole) == 0 || whole[0] == '0' || len(whole) > 3 || bytes.IndexByte(whole, other) >= 0
}
