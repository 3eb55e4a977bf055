// Package pages spares a command that lives for a tenth of a second much of the price
// of memory that is touched for the first time, page by page: the heap lies in large
// pages, the program's instructions are mapped in one call, and the main stack has its
// depth from the start. It is used for its initialisation alone. All of it is a hint; no
// value depends on it.
//
// It imports next to nothing, so that it is among the first packages to be
// initialised: the memory of the others' tables is then in large pages already.
package pages
