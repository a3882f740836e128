package access

import (
	"bufio"
	"crypto/rand"
	"crypto/sha256"
	"crypto/subtle"
	"encoding/base32"
	"encoding/hex"
	"fmt"
	"io"
	"log/slog"
	"os"
	"regexp"
	"strings"
	"sync"
	"sync/atomic"
	"time"
)

// Caller is whom a key belongs to.
type Caller struct {
	Name  string
	Scope Scope
}

// entry is one line of a key file: NAME SCOPE DIGEST, the digest being the SHA-256 of
// the key in hexadecimal.
type entry struct {
	Caller
	digest [sha256.Size]byte
}

// keyPrefix lets people and scanners recognise a key.
const keyPrefix = "railproof_"

// keyBytes of randomness are beyond guessing, so that one round of SHA-256 protects
// them as well as a slow hash would.
const keyBytes = 32

var nameForm = regexp.MustCompile(`^[A-Za-z0-9][A-Za-z0-9._-]{0,63}$`)

var letters = base32.NewEncoding("0123456789abcdefghjkmnpqrstvwxyz").WithPadding(base32.NoPadding)

// NewKey makes a key and the line of it for the key file. The key itself is kept
// nowhere.
func NewKey(c Caller) (key, line string, err error) {
	if !nameForm.MatchString(c.Name) {
		return "", "", fmt.Errorf("access: name %q: use letters, digits, dots, dashes and underscores, 64 at most", c.Name)
	}
	if c.Scope < Read || c.Scope > Admin {
		return "", "", fmt.Errorf("access: a key needs a scope")
	}
	var b [keyBytes]byte
	rand.Read(b[:]) //nolint:errcheck // documented never to fail
	key = keyPrefix + letters.EncodeToString(b[:])
	digest := sha256.Sum256([]byte(key))
	return key, fmt.Sprintf("%s %s %s", c.Name, c.Scope, hex.EncodeToString(digest[:])), nil
}

// parse reads a key file. Empty lines and those that begin with # are passed over.
func parse(r io.Reader) ([]entry, error) {
	var list []entry
	lines := bufio.NewScanner(r)
	for n := 1; lines.Scan(); n++ {
		text := strings.TrimSpace(lines.Text())
		if text == "" || strings.HasPrefix(text, "#") {
			continue
		}
		fields := strings.Fields(text)
		if len(fields) != 3 || !nameForm.MatchString(fields[0]) {
			return nil, fmt.Errorf("access: line %d: want NAME SCOPE DIGEST", n)
		}
		scope, err := ParseScope(fields[1])
		if err != nil {
			return nil, fmt.Errorf("access: line %d: %w", n, err)
		}
		e := entry{Caller: Caller{fields[0], scope}}
		digest, err := hex.DecodeString(fields[2])
		if err != nil || len(digest) != len(e.digest) {
			return nil, fmt.Errorf("access: line %d: the digest is not a SHA-256 in hexadecimal", n)
		}
		copy(e.digest[:], digest)
		list = append(list, e)
	}
	return list, lines.Err()
}

// Keys are the keys of a file, read again when it changes. It is safe for concurrent
// use.
type Keys struct {
	path  string
	log   *slog.Logger
	list  atomic.Pointer[[]entry]
	mutex sync.Mutex
	look  time.Time // when the file was last looked at
	stamp time.Time // of the file that was read
}

// lookEvery bounds how long a change of the file goes unseen.
const lookEvery = time.Second

// OpenKeys reads a key file.
func OpenKeys(path string, log *slog.Logger) (*Keys, error) {
	k := &Keys{path: path, log: log}
	return k, k.Reload()
}

// Reload reads the file. If it cannot be read, the keys stay as they are.
func (k *Keys) Reload() error {
	k.mutex.Lock()
	defer k.mutex.Unlock()
	return k.read()
}

func (k *Keys) read() error {
	f, err := os.Open(k.path)
	if err != nil {
		return fmt.Errorf("access: %w", err)
	}
	defer f.Close()
	if info, err := f.Stat(); err == nil {
		k.stamp = info.ModTime()
	}
	list, err := parse(f)
	if err != nil {
		return fmt.Errorf("%w, in %s", err, k.path)
	}
	k.list.Store(&list)
	k.log.Info("keys read", "keys", len(list))
	return nil
}

// refresh reads the file again if it has changed.
func (k *Keys) refresh() {
	if !k.mutex.TryLock() {
		return
	}
	defer k.mutex.Unlock()
	if time.Since(k.look) < lookEvery {
		return
	}
	k.look = time.Now()
	info, err := os.Stat(k.path)
	if err == nil && info.ModTime().Equal(k.stamp) {
		return
	}
	if err == nil {
		err = k.read()
	}
	if err != nil {
		k.log.Error("the key file cannot be read; the keys stay as they were", "cause", err)
	}
}

// Caller returns whom a key belongs to. Every key of the file is compared, each in
// constant time, so that the time tells nothing.
func (k *Keys) Caller(key string) (Caller, bool) {
	k.refresh()
	digest := sha256.Sum256([]byte(key))
	var found Caller
	known := 0
	list := *k.list.Load()
	for i := range list {
		same := subtle.ConstantTimeCompare(digest[:], list[i].digest[:])
		if same == 1 {
			found = list[i].Caller
		}
		known |= same
	}
	return found, known == 1
}
