// Package results keeps the bytes of answers by their identifiers, bounded in
// memory.
package results

import (
	"container/list"
	"sync"
)

// Cache keeps the answers that were asked for last. An identifier names one answer
// for ever, so an entry is never stale and never replaced. It is safe for
// concurrent use.
type Cache struct {
	mutex   sync.Mutex
	most    int64 // [bytes]
	held    int64 // [bytes]
	entries map[string]*list.Element
	recent  *list.List // of *entry, the last one asked for in front
}

// Answer is the bytes of an answer, their media type and what was answered. None of
// them ever changes.
type Answer struct {
	Operation string // empty where that was not noted
	Media     string
	Body      []byte
}

type entry struct {
	id string
	Answer
}

const (
	entryOverhead  = 512 // [bytes] a generous guess of what an entry takes beside its body
	greatestShare  = 4   // an answer above this part of the cache is not kept
	identifierSize = 68  // [bytes]
)

// New returns a cache that holds at most the given number of bytes. With none it
// keeps nothing.
func New(bytes int64) *Cache {
	return &Cache{most: bytes, entries: map[string]*list.Element{}, recent: list.New()}
}

// Get returns an answer.
func (c *Cache) Get(id string) (Answer, bool) {
	c.mutex.Lock()
	defer c.mutex.Unlock()
	at := c.entries[id]
	if at == nil {
		return Answer{}, false
	}
	c.recent.MoveToFront(at)
	return at.Value.(*entry).Answer, true
}

// Put keeps an answer and drops those that were not asked for longest.
func (c *Cache) Put(id string, a Answer) {
	size := sizeOf(a.Body)
	if size > c.most/greatestShare {
		return
	}
	c.mutex.Lock()
	defer c.mutex.Unlock()
	if at := c.entries[id]; at != nil {
		c.recent.MoveToFront(at)
		return
	}
	c.entries[id] = c.recent.PushFront(&entry{id, a})
	c.held += size
	for c.held > c.most {
		last := c.recent.Back()
		e := c.recent.Remove(last).(*entry)
		delete(c.entries, e.id)
		c.held -= sizeOf(e.Body)
	}
}

// Held returns the number of answers and the bytes that they are counted with.
func (c *Cache) Held() (answers int, bytes int64) {
	c.mutex.Lock()
	defer c.mutex.Unlock()
	return len(c.entries), c.held
}

func sizeOf(body []byte) int64 { return int64(cap(body)) + identifierSize + entryOverhead }
