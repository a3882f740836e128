// Package calctest holds what the tests of calc share: comparing numbers,
// finding the published reference data, and poisoning workspaces.
package calctest

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"runtime"
	"testing"
)

// Close fails the test unless got is within tol of want, relative to |want|.
// With want zero the tolerance is absolute. NaN is close to nothing.
func Close(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	scale := math.Abs(want)
	if scale == 0 {
		scale = 1
	}
	if !(math.Abs(got-want) <= tol*scale) {
		t.Errorf("%s: got %.15g, want %.15g, deviation %.3g relative, tolerance %.1g", what, got, want, (got-want)/scale, tol)
	}
}

// Within fails the test unless got is within the absolute tolerance tol of want.
func Within(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.15g, want %.15g, deviation %.3g, tolerance %.1g", what, got, want, got-want, tol)
	}
}

// Load decodes a file of tests/reference into dst.
func Load(t testing.TB, name string, dst any) {
	t.Helper()
	_, here, _, _ := runtime.Caller(0)
	text, err := os.ReadFile(filepath.Join(filepath.Dir(here), "..", "..", "..", "tests", "reference", name))
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(text, dst); err != nil {
		t.Fatalf("%s: %v", name, err)
	}
}

// Poison fills every exported float64 reachable in the struct, array or pointer
// dst with NaN, so that a result that is never written shows.
func Poison(dst any) { poison(reflect.ValueOf(dst)) }

func poison(v reflect.Value) {
	switch v.Kind() {
	case reflect.Pointer:
		if !v.IsNil() {
			poison(v.Elem())
		}
	case reflect.Struct:
		for i := range v.NumField() {
			if v.Type().Field(i).IsExported() {
				poison(v.Field(i))
			}
		}
	case reflect.Array, reflect.Slice:
		for i := range v.Len() {
			poison(v.Index(i))
		}
	case reflect.Float64:
		if v.CanSet() {
			v.SetFloat(math.NaN())
		}
	}
}
