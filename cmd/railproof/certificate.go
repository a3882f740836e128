package main

import (
	"crypto/tls"
	"fmt"
	"log/slog"
	"os"
	"sync"
	"time"
)

// keyPair is the server's certificate, read again when its file changes.
type keyPair struct {
	certificate, key string
	log              *slog.Logger
	mutex            sync.Mutex
	pair             *tls.Certificate
	stamp, look      time.Time
}

func (p *keyPair) read() error {
	pair, err := tls.LoadX509KeyPair(p.certificate, p.key)
	if err != nil {
		return fmt.Errorf("--tls-certificate: %w", err)
	}
	if info, err := os.Stat(p.certificate); err == nil {
		p.stamp = info.ModTime()
	}
	p.pair, p.look = &pair, time.Now()
	return nil
}

// certificateLook bounds how long a renewed certificate goes unseen.
const certificateLook = 10 * time.Second

func (p *keyPair) get(*tls.ClientHelloInfo) (*tls.Certificate, error) {
	p.mutex.Lock()
	defer p.mutex.Unlock()
	if time.Since(p.look) > certificateLook {
		p.look = time.Now()
		if info, err := os.Stat(p.certificate); err != nil || !info.ModTime().Equal(p.stamp) {
			p.again()
		}
	}
	return p.pair, nil
}

// reload reads the files now.
func (p *keyPair) reload() {
	p.mutex.Lock()
	defer p.mutex.Unlock()
	p.again()
}

// again reads the files; if they cannot be read, the certificate stays as it was.
func (p *keyPair) again() {
	if err := p.read(); err != nil {
		p.log.Error("the certificate cannot be read; the old one stays", "cause", err)
		return
	}
	p.log.Info("certificate read")
}
