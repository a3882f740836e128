// Package jobs keeps accepted work until it is done. A job is an operation and the
// canonical bytes of its request; what runs it is handed in. Jobs live in one
// database, an SQLite file or PostgreSQL, in a table of ours; a queue in the same
// database only tells which job to look at next, so that losing or repeating one of
// its messages loses and repeats nothing: a job is taken by an update that succeeds
// once, held by a heartbeat, and taken over when the heartbeat stops. Work is pure,
// so the worst that a takeover can cost is time.
//
// Every time that two processes compare is read from the database's clock.
package jobs
