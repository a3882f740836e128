// Package sampling yields the points at which a design is tried: independent,
// scrambled low-discrepancy and Latin-hypercube samples of the unit cube.
//
// Every coordinate of every sample is a function of the seed, the sample's index
// and the coordinate's index alone. A sample can therefore be asked for again by
// itself, and the points are the same bits however the samples are shared out
// among workers.
package sampling
