package e2e

import (
	"crypto/ecdsa"
	"crypto/elliptic"
	"crypto/rand"
	"crypto/tls"
	"crypto/x509"
	"crypto/x509/pkix"
	"encoding/pem"
	"io"
	"math/big"
	"net"
	"net/http"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// authority signs certificates for a test.
type authority struct {
	t    *testing.T
	cert *x509.Certificate
	key  *ecdsa.PrivateKey
	file string // PEM
}

func newAuthority(t *testing.T) *authority {
	t.Helper()
	a := &authority{t: t, file: filepath.Join(t.TempDir(), "authority.pem")}
	a.key = newKey(t)
	template := &x509.Certificate{SerialNumber: big.NewInt(1), Subject: pkix.Name{CommonName: "test authority"}, NotBefore: time.Now().Add(-time.Hour), NotAfter: time.Now().Add(time.Hour), IsCA: true, BasicConstraintsValid: true, KeyUsage: x509.KeyUsageCertSign}
	der, err := x509.CreateCertificate(rand.Reader, template, template, &a.key.PublicKey, a.key)
	require.NoError(t, err)
	a.cert, err = x509.ParseCertificate(der)
	require.NoError(t, err)
	require.NoError(t, os.WriteFile(a.file, pem.EncodeToMemory(&pem.Block{Type: "CERTIFICATE", Bytes: der}), 0o600))
	return a
}

func newKey(t *testing.T) *ecdsa.PrivateKey {
	t.Helper()
	key, err := ecdsa.GenerateKey(elliptic.P256(), rand.Reader)
	require.NoError(t, err)
	return key
}

// issue writes a certificate for the name and 127.0.0.1, and its key.
func (a *authority) issue(certificate, key, name string, serial int64, usage x509.ExtKeyUsage) {
	a.t.Helper()
	private := newKey(a.t)
	template := &x509.Certificate{SerialNumber: big.NewInt(serial), Subject: pkix.Name{CommonName: name}, NotBefore: time.Now().Add(-time.Hour), NotAfter: time.Now().Add(time.Hour), IPAddresses: []net.IP{net.IPv4(127, 0, 0, 1)}, KeyUsage: x509.KeyUsageDigitalSignature, ExtKeyUsage: []x509.ExtKeyUsage{usage}}
	der, err := x509.CreateCertificate(rand.Reader, template, a.cert, &private.PublicKey, a.key)
	require.NoError(a.t, err)
	secret, err := x509.MarshalPKCS8PrivateKey(private)
	require.NoError(a.t, err)
	require.NoError(a.t, os.WriteFile(certificate, pem.EncodeToMemory(&pem.Block{Type: "CERTIFICATE", Bytes: der}), 0o600))
	require.NoError(a.t, os.WriteFile(key, pem.EncodeToMemory(&pem.Block{Type: "PRIVATE KEY", Bytes: secret}), 0o600))
}

// client trusts the authority, and shows a certificate where one is given.
func (a *authority) client(pair ...string) *http.Client {
	a.t.Helper()
	config := &tls.Config{RootCAs: x509.NewCertPool()}
	config.RootCAs.AddCert(a.cert)
	if pair != nil {
		shown, err := tls.LoadX509KeyPair(pair[0], pair[1])
		require.NoError(a.t, err)
		config.Certificates = []tls.Certificate{shown}
	}
	transport := &http.Transport{TLSClientConfig: config, ForceAttemptHTTP2: true, DisableKeepAlives: true}
	a.t.Cleanup(transport.CloseIdleConnections)
	return &http.Client{Transport: transport}
}

// heard is an answer, read to its end.
type heard struct {
	status int
	proto  string
	header http.Header
	serial int64 // of the server's certificate; 0 without TLS
	text   string
}

func call(t *testing.T, c *http.Client, method, url, body, key string) (heard, error) {
	t.Helper()
	request, err := http.NewRequestWithContext(t.Context(), method, url, strings.NewReader(body))
	require.NoError(t, err)
	request.Header.Set("Content-Type", "application/json")
	if key != "" {
		request.Header.Set("Authorization", "Bearer "+key)
	}
	response, err := c.Do(request)
	if err != nil {
		return heard{}, err
	}
	defer response.Body.Close()
	text, err := io.ReadAll(response.Body)
	require.NoError(t, err)
	h := heard{status: response.StatusCode, proto: response.Proto, header: response.Header, text: string(text)}
	if response.TLS != nil {
		h.serial = response.TLS.PeerCertificates[0].SerialNumber.Int64()
	}
	return h, nil
}

// beyond starts a server on every address of the machine; where it is from here.
func beyond(t *testing.T, args ...string) (s *served, address string) {
	t.Helper()
	s = start(t, append([]string{"--address", "0.0.0.0:0"}, args...))
	_, port, err := net.SplitHostPort(strings.TrimPrefix(s.base, "https://"))
	require.NoError(t, err)
	require.True(t, strings.HasPrefix(s.base, "https://"), s.base)
	return s, "127.0.0.1:" + port
}

// A server that other machines reach: TLS, and keys.
func TestTLSAndKeys(t *testing.T) {
	a := newAuthority(t)
	dir := t.TempDir()
	certificate, key, keys := filepath.Join(dir, "tls.pem"), filepath.Join(dir, "tls.key"), filepath.Join(dir, "keys")
	a.issue(certificate, key, "server", 10, x509.ExtKeyUsageServerAuth)
	secret := strings.TrimSpace(railproof(t, "", "key", "new", "--name", "plm", "--scope", "compute", "--file", keys).out)
	s, address := beyond(t, "--tls-certificate", certificate, "--tls-key", key, "--keys", keys)
	c, base, body := a.client(), "https://"+address, example(t, "buoy-5v0/losses.json")

	r, err := call(t, c, http.MethodPost, base+"/v1/losses", body, secret)
	require.NoError(t, err)
	require.Equal(t, 200, r.status, r.text)
	require.Equal(t, "HTTP/2.0", r.proto)
	require.NotEmpty(t, r.header.Get("Strict-Transport-Security"))
	require.NotEmpty(t, r.header.Get("RateLimit"), "beyond this machine there is a quota")
	require.EqualValues(t, 10, r.serial)

	r, err = call(t, c, http.MethodPost, base+"/v1/losses", body, "")
	require.NoError(t, err)
	require.Equal(t, 401, r.status)
	require.Contains(t, r.text, `"type":"`+base+`/docs/problems/unauthorized"`)

	_, err = call(t, http.DefaultClient, http.MethodGet, base+"/healthz", "", "")
	require.ErrorContains(t, err, "certificate", "an unknown authority")
	old := a.client()
	config := old.Transport.(*http.Transport).TLSClientConfig
	config.MinVersion, config.MaxVersion = tls.VersionTLS10, tls.VersionTLS11 //nolint:gosec // to see it refused
	_, err = call(t, old, http.MethodGet, base+"/healthz", "", "")
	require.ErrorContains(t, err, "protocol version")
	plain, err := call(t, http.DefaultClient, http.MethodGet, "http://"+address+"/healthz", "", "")
	require.NoError(t, err)
	require.Equal(t, 400, plain.status)

	require.Equal(t, 0, railproof(t, "", "healthy", "--address", address, "--tls-certificate", certificate, "--tls-key", key).code)
	require.Equal(t, 1, railproof(t, "", "healthy", "--address", address).code)

	a.issue(certificate, key, "server", 11, x509.ExtKeyUsageServerAuth)
	require.NoError(t, os.WriteFile(keys, nil, 0o600))
	require.NoError(t, s.process.Process.Signal(syscall.SIGHUP))
	require.Eventually(t, func() bool {
		r, err := call(t, c, http.MethodGet, base+"/v1/quantities", "", secret)
		return err == nil && r.status == http.StatusUnauthorized && r.serial == 11
	}, 10*time.Second, 20*time.Millisecond, "a renewed certificate and a revoked key, without a restart")
}

// Clients that show a certificate need no key.
func TestClientCertificates(t *testing.T) {
	a, stranger := newAuthority(t), newAuthority(t)
	dir := t.TempDir()
	at := func(name string) string { return filepath.Join(dir, name) }
	a.issue(at("tls.pem"), at("tls.key"), "server", 10, x509.ExtKeyUsageServerAuth)
	a.issue(at("plm.pem"), at("plm.key"), "plm.example", 20, x509.ExtKeyUsageClientAuth)
	stranger.issue(at("other.pem"), at("other.key"), "other.example", 30, x509.ExtKeyUsageClientAuth)
	server := []string{"--tls-certificate", at("tls.pem"), "--tls-key", at("tls.key"), "--client-certificates", a.file}
	s, address := beyond(t, server...)
	base := "https://" + address

	c := a.client(at("plm.pem"), at("plm.key"))
	r, err := call(t, c, http.MethodPost, base+"/v1/losses", example(t, "buoy-5v0/losses.json"), "")
	require.NoError(t, err)
	require.Equal(t, 200, r.status, r.text)
	r, err = call(t, c, http.MethodGet, base+"/metrics", "", "")
	require.NoError(t, err)
	require.Equal(t, 403, r.status, "such a client may compute and no more")
	require.Contains(t, r.text, "forbidden")

	for name, c := range map[string]*http.Client{"none": a.client(), "of another authority": a.client(at("other.pem"), at("other.key")), "a server's": a.client(at("tls.pem"), at("tls.key"))} {
		_, err := call(t, c, http.MethodGet, base+"/healthz", "", "")
		require.Error(t, err, name)
	}
	require.Equal(t, 0, railproof(t, "", append([]string{"healthy", "--address", address}, server...)...).code)
	require.NoError(t, s.process.Process.Signal(syscall.SIGTERM))
	require.NoError(t, s.process.Wait())
	require.Contains(t, s.log.String(), `"caller":"plm.example"`)
}
