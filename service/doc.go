// Package service holds the use cases: each takes a context and a plain request
// and returns a plain answer. It drives calc in short chunks, so that cores,
// cancellation and budgets stay out of the physics, and says beside every answer
// what it rests on. It knows no HTTP and no JSON shapes.
package service
