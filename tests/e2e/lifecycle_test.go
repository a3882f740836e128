package e2e

import (
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

func TestOtherMachinesAreNotLetInByAccident(t *testing.T) {
	r := railproof(t, "", "serve", "--ephemeral", "--address", "0.0.0.0:0")
	require.Equal(t, 2, r.code)
	require.Contains(t, r.err, "--tls-certificate")
	require.Contains(t, r.err, "--open-to-anyone")
	r = railproof(t, "", "serve", "--check", "--ephemeral", "--address", "0.0.0.0:0", "--open-to-anyone")
	require.Equal(t, 0, r.code, r.err)
	r = railproof(t, "", "serve", "--check", "--ephemeral", "--admin-address", "0.0.0.0:6060")
	require.Equal(t, 2, r.code)
}

func TestCheckFindsWhatIsWrong(t *testing.T) {
	keys := filepath.Join(t.TempDir(), "keys")
	require.NoError(t, os.WriteFile(keys, []byte("plm everything 00\n"), 0o600))
	settings := filepath.Join(t.TempDir(), "settings")
	require.NoError(t, os.WriteFile(settings, []byte("# nightly\nRAILPROOF_DEADLINE=soon\n"), 0o600))
	unknown := filepath.Join(t.TempDir(), "unknown")
	require.NoError(t, os.WriteFile(unknown, []byte("RAILPROOF_DEADLINES=1s\n"), 0o600))
	for name, args := range map[string][]string{
		"line 1":             {"--keys", keys},
		"RAILPROOF_DEADLINE": {"--config", settings},
		"line 1: want":       {"--config", unknown},
		"no such file":       {"--tls-certificate", "nowhere.pem", "--tls-key", "nowhere.key"},
		"go together":        {"--tls-key", "nowhere.key"},
		"exclude each other": {"--data-directory", "x"},
		"log level":          {"--log-level", "loud"},
		"--proxies":          {"--proxies", "10.0.0.1"},
	} {
		t.Run(name, func(t *testing.T) {
			r := railproof(t, "", append([]string{"serve", "--check", "--ephemeral"}, args...)...)
			require.Equal(t, 2, r.code)
			require.Contains(t, r.err, name)
		})
	}
}

func TestFlagBeatsEnvironmentBeatsFile(t *testing.T) {
	settings := filepath.Join(t.TempDir(), "settings")
	require.NoError(t, os.WriteFile(settings, []byte("RAILPROOF_ADDRESS=127.0.0.1:1\nRAILPROOF_EPHEMERAL=true\n"), 0o600))
	check := func(args []string, environment ...string) string {
		c := exec.CommandContext(t.Context(), program, append([]string{"serve", "--check", "--config", settings}, args...)...)
		c.Env = append(c.Environ(), environment...)
		out, err := c.CombinedOutput()
		require.NoError(t, err, "%s", out)
		return string(out)
	}
	require.Contains(t, check(nil), "127.0.0.1:1\n")
	require.Contains(t, check(nil, "RAILPROOF_ADDRESS=127.0.0.1:2"), "127.0.0.1:2\n")
	require.Contains(t, check([]string{"--address", "127.0.0.1:3"}, "RAILPROOF_ADDRESS=127.0.0.1:2"), "127.0.0.1:3\n")
}

func TestKeysFromTheCommandLineOpenTheServer(t *testing.T) {
	keys := filepath.Join(t.TempDir(), "keys")
	made := railproof(t, "", "key", "new", "--name", "plm", "--scope", "compute", "--file", keys)
	require.Equal(t, 0, made.code, made.err)
	key := strings.TrimSpace(made.out)
	text, err := os.ReadFile(keys)
	require.NoError(t, err)
	require.NotContains(t, string(text), key)
	s := start(t, []string{"--address", "127.0.0.1:0", "--keys", keys})
	status, _ := get(t, s.base+"/v1/quantities")
	require.Equal(t, 401, status)
	status, page := get(t, s.base+"/v1/quantities", "Authorization", "Bearer "+key)
	require.Equal(t, 200, status)
	require.Contains(t, page, "output_ripple_pp_v")
	address := strings.TrimPrefix(s.base, "http://")
	require.Equal(t, 0, railproof(t, "", "healthy", "--address", address).code)
	require.Equal(t, 1, railproof(t, "", "healthy", "--address", "127.0.0.1:1").code)
	require.Equal(t, 2, railproof(t, "", "key", "new", "--name", "a b").code)
	require.Equal(t, 2, railproof(t, "", "key", "old").code)
	require.NotContains(t, s.log.String(), key)
}
