package main

import (
	"context"
	"crypto/tls"
	"flag"
	"fmt"
	"net"
	"net/http"
	"time"
)

// healthPatience bounds the look at a server.
const healthPatience = 2 * time.Second

var healthyCommand = &command{
	name: "healthy", summary: "ask a server on this machine whether it lives",
	about: `Asks /healthz of the server that the same settings would start, and ends with 0 if it answers, with 1
if it does not. For health checks of containers, which have no other program.`,
	example: "railproof healthy --address 127.0.0.1:8080",
	prepare: func(flags *flag.FlagSet) action {
		var c serveConfig
		c.declare(flags)
		return func(ctx context.Context, t terminal, _ []string) int {
			if err := configure(flags, &c.file, t.env); err != nil {
				fmt.Fprintf(t.err, "railproof healthy: %v\n", err)
				return exitBadInput
			}
			if err := c.healthy(ctx); err != nil {
				fmt.Fprintf(t.err, "railproof healthy: %v\n", err)
				return exitFails
			}
			fmt.Fprintln(t.out, "ok")
			return exitFine
		}
	},
}

func (c *serveConfig) healthy(ctx context.Context) error {
	ctx, cancel := context.WithTimeout(ctx, healthPatience)
	defer cancel()
	host, port, err := net.SplitHostPort(c.address)
	if err != nil {
		return err
	}
	if ip := net.ParseIP(host); host == "" || ip != nil && ip.IsUnspecified() {
		host = "127.0.0.1"
	}
	address := net.JoinHostPort(host, port)
	if c.access.clients != "" { // it answers nobody without a certificate
		connection, err := (&net.Dialer{}).DialContext(ctx, "tcp", address)
		if err != nil {
			return err
		}
		return connection.Close()
	}
	scheme := "http"
	if c.access.certificate != "" {
		scheme = "https"
	}
	request, err := http.NewRequestWithContext(ctx, http.MethodGet, scheme+"://"+address+"/healthz", nil)
	if err != nil {
		return err
	}
	// the server's certificate is for another name, and nothing secret is sent
	client := http.Client{Transport: &http.Transport{TLSClientConfig: &tls.Config{InsecureSkipVerify: true}}} //nolint:gosec // as said
	response, err := client.Do(request)
	if err != nil {
		return err
	}
	defer response.Body.Close()
	if response.StatusCode != http.StatusOK {
		return fmt.Errorf("%s answers %s", address, response.Status)
	}
	return nil
}
