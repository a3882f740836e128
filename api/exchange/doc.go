// Package exchange answers an operation of the contract from the bytes of its
// request: read strictly, check against the contract, decode, run the use case,
// encode, check again. The HTTP server and the command line both go through it,
// so they refuse the same input with the same pointers. It knows no HTTP but the
// status numbers that problem details carry.
package exchange
