// Package access knows who may do what, and how often: keys with scopes, kept as
// digests in a file, and a limiter of requests per caller.
package access
