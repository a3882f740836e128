package wire

// Integer is a whole number. It reads 2, 2.0 and 2e0 alike, as JSON has one kind
// of number, and writes 2.
type Integer int64
