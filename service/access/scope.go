package access

import (
	"fmt"
	"strings"
)

// Scope is what a key allows. Each includes those before it.
type Scope uint8

const (
	None    Scope = iota
	Read          // look at dictionaries, jobs and results
	Compute       // start and cancel work
	Admin         // look at what operators see
)

var scopeNames = []string{"none", "read", "compute", "admin"}

func (s Scope) String() string { return scopeNames[s] }

// ParseScope reads the name of a scope.
func ParseScope(name string) (Scope, error) {
	for s := Read; s <= Admin; s++ {
		if scopeNames[s] == name {
			return s, nil
		}
	}
	return None, fmt.Errorf("access: no scope %q: use %s", name, strings.Join(scopeNames[1:], ", "))
}
