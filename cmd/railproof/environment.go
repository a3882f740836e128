package main

import (
	"flag"
	"fmt"
	"strings"
)

// fromEnvironment sets every flag that was not given from RAILPROOF_ and its name
// in capitals, with _ for -.
func fromEnvironment(flags *flag.FlagSet, env func(string) string) error {
	given := map[string]bool{}
	flags.Visit(func(f *flag.Flag) { given[f.Name] = true })
	var failed error
	flags.VisitAll(func(f *flag.Flag) {
		key := "RAILPROOF_" + strings.ToUpper(strings.ReplaceAll(f.Name, "-", "_"))
		value := env(key)
		if given[f.Name] || value == "" || failed != nil {
			return
		}
		if err := flags.Set(f.Name, value); err != nil {
			failed = fmt.Errorf("%s: %w", key, err)
		}
	})
	return failed
}
