// Package openapi holds the contract of the service, openapi.yaml, and everything
// that follows from it alone: the operations, the check of requests and responses
// against their schemas, and the example requests.
//
// kin-openapi reads the contract; the checks are compiled once from its model. A request is checked as the
// tree that a JSON parser yields; every fault is reported with its JSON Pointer,
// what was given and what is accepted. A response is checked as the Go value that
// will be encoded, by a plan compiled once for each pair of Go type and schema,
// so that checking every answer costs a small part of computing it. Both reach
// the verdict that kin-openapi's own validation reaches on the same document;
// tests hold them against it.
//
// openapi.json is openapi.yaml in JSON, kept beside it because it is served and
// read faster at start; a test rewrites it on request and fails when it is stale.
//
// The package knows no HTTP server, so that the command line refuses the same
// input with the same pointers.
package openapi
