package wire

import (
	"fmt"
	"math"

	"github.com/go-json-experiment/json/jsontext"
)

// Integer is a whole number. It reads 2, 2.0 and 2e0 alike, as JSON has one kind
// of number, and writes 2.
type Integer int64

// UnmarshalJSONFrom reads a number without a fraction.
func (n *Integer) UnmarshalJSONFrom(d *jsontext.Decoder) error {
	if kind := d.PeekKind(); kind != '0' {
		return fmt.Errorf("a whole number, not %v", kind)
	}
	t, err := d.ReadToken()
	if err != nil {
		return err
	}
	v, err := t.Float()
	if err != nil {
		return err
	}
	if v != math.Trunc(v) || math.Abs(v) > 1<<53 {
		return fmt.Errorf("a whole number, not %v", v)
	}
	*n = Integer(v)
	return nil
}
