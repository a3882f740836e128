package jobs

import (
	"crypto/rand"
	"encoding/base32"
	"encoding/base64"
	"encoding/binary"
	"regexp"
	"time"
)

var digits = base32.NewEncoding("0123456789abcdefghjkmnpqrstvwxyz").WithPadding(base32.NoPadding)

// newID returns an identifier that sorts by the time it was made and cannot be
// guessed.
func newID(prefix string, now time.Time) string {
	var b [20]byte
	binary.BigEndian.PutUint64(b[2:], uint64(now.UnixMilli()))
	rand.Read(b[10:]) //nolint:errcheck // documented never to fail
	return prefix + digits.EncodeToString(b[4:])
}

var idForm = regexp.MustCompile(`^job_[0-9a-z]{26}$`)

func encodeCursor(id string) string { return base64.RawURLEncoding.EncodeToString([]byte(id)) }

func decodeCursor(cursor string) (string, error) {
	id, err := base64.RawURLEncoding.DecodeString(cursor)
	if err != nil || !idForm.Match(id) {
		return "", ErrCursor
	}
	return string(id), nil
}
