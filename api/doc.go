// Package api is the HTTP transport: routes, negotiation, limits, problem bodies.
// What an operation computes is decided in package exchange, which the command
// line shares; nothing here knows physics.
package api
