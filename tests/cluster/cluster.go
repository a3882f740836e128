// Package cluster starts a PostgreSQL server of a test's own, in a directory that
// goes with the test, on a free port of the loopback address. It takes the programs
// of the newest version that is installed.
package cluster

import (
	"context"
	"fmt"
	"net"
	"os"
	"os/exec"
	"os/user"
	"path/filepath"
	"strconv"
	"syscall"
	"testing"
	"time"
)

// Cluster is a server that a test can stop, kill and start again.
type Cluster struct {
	DSN       string
	t         testing.TB
	programs  string
	directory string
	port      int
	as        *syscall.Credential // nil: as the test
}

// Start starts a server; it ends with the test.
func Start(t testing.TB) *Cluster {
	t.Helper()
	programs, err := filepath.Glob("/usr/lib/postgresql/*/bin")
	if err != nil || len(programs) == 0 {
		t.Fatal("PostgreSQL is not installed: on Debian, apt-get install postgresql")
	}
	directory, err := os.MkdirTemp("", "cluster")
	if err != nil {
		t.Fatal(err)
	}
	c := &Cluster{t: t, programs: programs[len(programs)-1], directory: directory, port: freePort(t)}
	c.DSN = fmt.Sprintf("postgres://postgres@127.0.0.1:%d/postgres?sslmode=disable", c.port)
	if os.Getuid() == 0 { // the server refuses to run as root
		c.as = postgresUser(t)
		if err := os.Chown(directory, int(c.as.Uid), int(c.as.Gid)); err != nil {
			t.Fatal(err)
		}
	}
	t.Cleanup(func() {
		c.Kill()
		_ = os.RemoveAll(directory)
	})
	c.run("initdb", "-D", c.data(), "-U", "postgres", "-A", "trust", "--no-sync", "-E", "UTF8", "--locale=C")
	c.Resume()
	return c
}

func (c *Cluster) data() string { return filepath.Join(c.directory, "data") }

// Resume starts the server again.
func (c *Cluster) Resume() {
	c.t.Helper()
	options := fmt.Sprintf("-p %d -c listen_addresses=127.0.0.1 -c unix_socket_directories=%s -c shared_buffers=32MB -c max_connections=60", c.port, c.directory)
	c.run("pg_ctl", "-D", c.data(), "-w", "-t", "60", "-l", filepath.Join(c.directory, "log"), "-o", options, "start")
}

// Kill ends the server without letting it finish anything.
func (c *Cluster) Kill() {
	command := c.command("pg_ctl", "-D", c.data(), "-w", "-t", "30", "-m", "immediate", "stop")
	_ = command.Run() // not running is what is wanted
}

// Execute runs statements in the server.
func (c *Cluster) Execute(statements string) string {
	c.t.Helper()
	out, err := c.command("psql", "-h", "127.0.0.1", "-p", strconv.Itoa(c.port), "-U", "postgres", "-X", "-A", "-t", "-c", statements).CombinedOutput()
	if err != nil {
		c.t.Fatalf("psql: %v\n%s", err, out)
	}
	return string(out)
}

func (c *Cluster) run(program string, args ...string) {
	c.t.Helper()
	if out, err := c.command(program, args...).CombinedOutput(); err != nil {
		c.t.Fatalf("%s: %v\n%s", program, err, out)
	}
}

func (c *Cluster) command(program string, args ...string) *exec.Cmd {
	command := exec.CommandContext(context.Background(), filepath.Join(c.programs, program), args...)
	command.Dir = c.directory
	command.WaitDelay = time.Second
	command.SysProcAttr = &syscall.SysProcAttr{Credential: c.as}
	return command
}

func postgresUser(t testing.TB) *syscall.Credential {
	t.Helper()
	u, err := user.Lookup("postgres")
	if err != nil {
		t.Fatal(err)
	}
	uid, err := strconv.ParseUint(u.Uid, 10, 32)
	if err != nil {
		t.Fatal(err)
	}
	gid, err := strconv.ParseUint(u.Gid, 10, 32)
	if err != nil {
		t.Fatal(err)
	}
	return &syscall.Credential{Uid: uint32(uid), Gid: uint32(gid)}
}

func freePort(t testing.TB) int {
	t.Helper()
	l, err := (&net.ListenConfig{}).Listen(context.Background(), "tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	return l.Addr().(*net.TCPAddr).Port
}
