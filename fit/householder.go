package fit

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

// triangularise overwrites the m×n matrix held in columns (n columns of m ≥ n
// numbers) by its Householder QR decomposition without pivoting, A = Q·R.
// Afterwards R is in columns[j][i] for i ≤ j, and below the diagonal stand the
// mirrors that make up Q, whose first elements are returned as heads.
//
// The error of R grows with the condition number of A, where that of a
// factor of AᵀA would grow with its square. Golub and Van Loan, Matrix
// Computations, algorithm 5.2.1 (from memory).
func triangularise(columns [][]float64) (heads []float64) {
	heads = make([]float64, len(columns))
	for j, column := range columns {
		v := column[j:]
		diagonal := -math.Copysign(floats.Norm(v, 2), v[0])
		heads[j] = v[0] - diagonal
		v[0] = diagonal
		for _, other := range columns[j+1:] {
			reflect(other[j:], v, heads[j])
		}
	}
	return heads
}

// rotate overwrites x (m numbers) by Qᵀ·x for a matrix that triangularise has
// decomposed.
func rotate(x []float64, columns [][]float64, heads []float64) {
	for j, column := range columns {
		reflect(x[j:], column[j:], heads[j])
	}
}

// reflect mirrors x at the plane normal to (head, v[1:]), where v[0] holds the
// element of R that the mirror made: vᵀv/2 = −v[0]·head. A zero head stands
// for a zero column, which needs no mirror.
func reflect(x, v []float64, head float64) {
	if head == 0 {
		return
	}
	share := (head*x[0] + floats.Dot(v[1:], x[1:])) / (v[0] * head)
	x[0] += share * head
	floats.AddScaled(x[1:], share, v[1:])
}

// backSubstitute solves R·x = b for the upper triangle R held in columns and
// writes x over b[:n]. A zero on the diagonal gives infinities.
func backSubstitute(columns [][]float64, b []float64) {
	for j := len(columns) - 1; j >= 0; j-- {
		b[j] /= columns[j][j]
		floats.AddScaled(b[:j], -b[j], columns[j][:j])
	}
}

// invertTriangle returns the inverse of the upper triangle R held in columns,
// again by columns (n of n numbers), or false where a column depends on the
// ones before: where no more than share of its length is left when they are
// taken out.
func invertTriangle(columns [][]float64, share float64) (inverse [][]float64, ok bool) {
	n := len(columns)
	inverse = make([][]float64, n)
	for j, column := range columns {
		if !(math.Abs(column[j]) > share*floats.Norm(column[:j+1], 2)) {
			return nil, false
		}
		inverse[j] = make([]float64, n)
		inverse[j][j] = 1
		backSubstitute(columns[:j+1], inverse[j])
	}
	return inverse, true
}

// orthonormal returns an orthonormal basis of the columns, which it overwrites,
// by Gram–Schmidt done twice. A column of which no more than share of its
// length is left when the ones before are taken out is left out.
func orthonormal(columns [][]float64, share float64) [][]float64 {
	var basis [][]float64
	for _, column := range columns {
		before := floats.Norm(column, 2)
		for range 2 {
			for _, b := range basis {
				floats.AddScaled(column, -floats.Dot(column, b), b)
			}
		}
		if after := floats.Norm(column, 2); after > share*before {
			floats.Scale(1/after, column)
			basis = append(basis, column)
		}
	}
	return basis
}
