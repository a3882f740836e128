package service

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"fmt"

	"github.com/go-json-experiment/json/jsontext"
)

// ResultID names the answer to a request: "res_" and the SHA-256, in hexadecimal,
// of the RFC 8785 form of {"engine": …, "operation": …, "request": …}. The request
// is JSON text; how it is spaced, ordered or how its numbers are written does not
// matter.
func ResultID(operation string, e Engine, request []byte) (string, error) {
	canonical, err := Canonical(request)
	if err != nil {
		return "", err
	}
	var b bytes.Buffer
	b.Grow(len(canonical) + 256)
	b.WriteString(`{"engine":{"contract_version":`)
	quote(&b, e.ContractVersion)
	b.WriteString(`,"name":`)
	quote(&b, e.Name)
	b.WriteString(`,"platform":`)
	quote(&b, e.Platform)
	b.WriteString(`,"version":`)
	quote(&b, e.Version)
	b.WriteString(`},"operation":`)
	quote(&b, operation)
	b.WriteString(`,"request":`)
	b.Write(canonical)
	b.WriteByte('}')
	sum := sha256.Sum256(b.Bytes())
	return "res_" + hex.EncodeToString(sum[:]), nil
}

// Canonical returns the RFC 8785 form of JSON text and leaves the text alone.
func Canonical(text []byte) ([]byte, error) {
	v := jsontext.Value(bytes.Clone(text))
	if err := v.Canonicalize(); err != nil {
		return nil, fmt.Errorf("service: canonical form: %w", err)
	}
	return v, nil
}

func quote(b *bytes.Buffer, s string) {
	q, err := jsontext.AppendQuote(b.AvailableBuffer(), s)
	if err != nil {
		panic("service: a name of ours is not UTF-8")
	}
	b.Write(q)
}
