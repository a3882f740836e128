package golden

import (
	"encoding/json"
	"strings"
	"testing"
	"unicode/utf8"

	"github.com/stretchr/testify/require"

	"railproof/api/exchange"
)

// The text of every answer is what encoding/json writes, byte for byte.
func TestAnswersAreWrittenAsTheStandardLibraryDoes(t *testing.T) {
	eachAnswer(t, func(t *testing.T, _ *example, a *exchange.Answer) {
		want, err := json.Marshal(a.Value)
		require.NoError(t, err)
		require.Equal(t, string(want)+"\n", string(a.Body))
	})
}

// What --table shows of every answer fits a terminal.
func TestTablesFitTheTerminal(t *testing.T) {
	eachAnswer(t, func(t *testing.T, _ *example, a *exchange.Answer) {
		table, problem := a.Render(exchange.TextForm)
		require.Nil(t, problem)
		require.NotEmpty(t, table)
		for line := range strings.Lines(string(table)) {
			require.LessOrEqual(t, utf8.RuneCountInString(strings.TrimRight(line, "\n")), 100, line)
		}
	})
}
