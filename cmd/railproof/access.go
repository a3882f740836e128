package main

import (
	"crypto/tls"
	"crypto/x509"
	"flag"
	"fmt"
	"log/slog"
	"net"
	"os"
	"strings"

	"railproof/api"
	"railproof/service/access"
)

// accessConfig says who may reach the server.
type accessConfig struct {
	keys         string
	certificate  string
	key          string
	clients      string
	clientsScope string
	open         bool
	hosts        string
	origins      string
	proxies      string
	rate         float64
	burst        int
}

func (c *accessConfig) declare(f *flag.FlagSet) {
	f.StringVar(&c.keys, "keys", "", "`FILE` of keys, as railproof key new writes it; read again when it changes")
	f.StringVar(&c.certificate, "tls-certificate", "", "`FILE` of the server's certificate chain in PEM; read again when it changes")
	f.StringVar(&c.key, "tls-key", "", "`FILE` of the certificate's key in PEM")
	f.StringVar(&c.clients, "client-certificates", "", "`FILE` of the authorities in PEM that sign clients' certificates; every client needs one then")
	f.StringVar(&c.clientsScope, "client-scope", "compute", "`SCOPE` of a client with such a certificate and no key: read, compute or admin")
	f.BoolVar(&c.open, "open-to-anyone", false, "serve beyond this machine without TLS or without keys")
	f.StringVar(&c.hosts, "hosts", "", "`NAMES`, with commas, under which a server without keys may be reached besides localhost")
	f.StringVar(&c.origins, "origins", "", "`ORIGINS`, with commas, from which browsers may call; none without it")
	f.StringVar(&c.proxies, "proxies", "", "`NETWORKS`, with commas, whose X-Forwarded-For is believed, such as 10.0.0.0/8")
	f.Float64Var(&c.rate, "rate", 0, "`REQUESTS` per second that each key, or address without one, may send in the long run; 0 means 50 beyond this machine and no limit on it")
	f.IntVar(&c.burst, "burst", 200, "`REQUESTS` that each may send at once")
}

const defaultRate = 50 // [Hz] beyond this machine

// door is what the configuration comes to.
type door struct {
	access api.Access
	tls    *tls.Config // nil: none
	pair   *keyPair    // of tls; nil: none
	keys   *access.Keys
	loud   string // what must be said loudly; "" is nothing
}

// reload reads the files again. Those that cannot be read change nothing.
func (d *door) reload(log *slog.Logger) {
	if d.pair != nil {
		d.pair.reload()
	}
	if d.keys == nil {
		return
	}
	if err := d.keys.Reload(); err != nil {
		log.Error("the key file cannot be read; the keys stay as they were", "cause", err)
	}
}

// check reads the files and refuses what would let in strangers.
func (c *accessConfig) check(address string, log *slog.Logger) (*door, error) {
	local, err := onThisMachine(address)
	if err != nil {
		return nil, err
	}
	d := &door{}
	if err := c.checkTLS(d, log); err != nil {
		return nil, err
	}
	if c.keys != "" {
		if d.keys, err = access.OpenKeys(c.keys, log); err != nil {
			return nil, err
		}
		d.access.Keys = d.keys
	}
	known := d.keys != nil || c.clients != ""
	if !local && (d.tls == nil || !known) {
		if !c.open {
			return nil, fmt.Errorf("%s can be reached from other machines: give --tls-certificate and --tls-key, and --keys or --client-certificates; or --open-to-anyone", address)
		}
		d.loud = "this server can be reached from other machines without TLS or without keys, as --open-to-anyone allows"
	}
	if local && !known {
		d.access.Hosts = append([]string{"localhost", "127.0.0.1", "::1"}, list(c.hosts)...)
		if host, _, err := net.SplitHostPort(address); err == nil && host != "" {
			d.access.Hosts = append(d.access.Hosts, host)
		}
	}
	if c.rate < 0 || c.burst < 1 {
		return nil, fmt.Errorf("--rate must not be negative and --burst at least 1")
	}
	if c.rate == 0 && !local {
		c.rate = defaultRate
	}
	if c.rate > 0 {
		d.access.Limiter = access.NewLimiter(c.rate, c.burst)
	}
	d.access.Origins = list(c.origins)
	for _, text := range list(c.proxies) {
		_, network, err := net.ParseCIDR(text)
		if err != nil {
			return nil, fmt.Errorf("--proxies: %w", err)
		}
		d.access.Proxies = append(d.access.Proxies, network)
	}
	return d, nil
}

func (c *accessConfig) checkTLS(d *door, log *slog.Logger) error {
	if (c.certificate == "") != (c.key == "") {
		return fmt.Errorf("--tls-certificate and --tls-key go together")
	}
	if c.clients != "" && c.certificate == "" {
		return fmt.Errorf("--client-certificates needs --tls-certificate and --tls-key")
	}
	if c.certificate == "" {
		return nil
	}
	pair := &keyPair{certificate: c.certificate, key: c.key, log: log}
	if err := pair.read(); err != nil {
		return err
	}
	d.pair = pair
	d.tls = &tls.Config{MinVersion: tls.VersionTLS12, GetCertificate: pair.get, NextProtos: []string{"h2", "http/1.1"}}
	if c.clients == "" {
		return nil
	}
	text, err := os.ReadFile(c.clients)
	if err != nil {
		return fmt.Errorf("--client-certificates: %w", err)
	}
	d.tls.ClientCAs = x509.NewCertPool()
	if !d.tls.ClientCAs.AppendCertsFromPEM(text) {
		return fmt.Errorf("--client-certificates: no certificate in %s", c.clients)
	}
	d.tls.ClientAuth = tls.RequireAndVerifyClientCert
	d.access.Certificates, err = access.ParseScope(c.clientsScope)
	return err
}

// onThisMachine reports whether only this machine reaches the address.
func onThisMachine(address string) (bool, error) {
	host, _, err := net.SplitHostPort(address)
	if err != nil {
		return false, fmt.Errorf("--address: %w", err)
	}
	if host == "localhost" {
		return true, nil
	}
	ip := net.ParseIP(host)
	return ip != nil && ip.IsLoopback(), nil
}

func list(text string) []string {
	var entries []string
	for entry := range strings.SplitSeq(text, ",") {
		if entry = strings.TrimSpace(entry); entry != "" {
			entries = append(entries, entry)
		}
	}
	return entries
}
