// Package wire holds the JSON shapes of the contract and turns them into the
// plain structs of calc and back. It checks what a schema cannot say about
// spreads and groups, and puts JSON Pointers to what calc reports by field id.
//
// It knows no HTTP: the command line decodes and encodes with it as well.
package wire
