// Package openapi holds the contract of the service, openapi.yaml, and everything
// that follows from it alone: the operations, the check of requests and responses
// against their schemas, and the example requests.
//
// The checks are compiled once from the contract. A request is checked as the
// tree that a JSON parser yields; every fault is reported with its JSON Pointer,
// what was given and what is accepted. A response is checked as the Go value that
// will be encoded, by a plan compiled once for each pair of Go type and schema,
// so that checking every answer costs a small part of computing it. Both reach
// the verdict that a general validator of OpenAPI 3.0 schemas reaches on the same
// document; tests hold them against one.
//
// openapi.json is openapi.yaml in JSON, kept beside it because it is read ten
// times faster at start; a test rewrites it on request and fails when it is stale.
//
// The package knows no HTTP server, so that the command line refuses the same
// input with the same pointers.
package openapi
