// Package render writes answers in forms for people and spreadsheets.
package render
