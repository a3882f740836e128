// Package corners proves a design over its tolerances and conditions: the worst
// point found, root-sum-square, Monte Carlo with yield, and which spread
// contributes what.
//
// A Problem is a box of coordinates, each in [-1, 1] with the typical value at 0,
// and a Model that evaluates quantities at a point of it. Every method is a Job: it
// hands out Work in numbered tasks of about a millisecond or less, which may run in
// any order on any number of workers, and goes on when all of them are done. The
// results are the same bits for any number of workers.
package corners
