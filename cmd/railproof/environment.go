package main

import (
	"bufio"
	"flag"
	"fmt"
	"os"
	"strings"
)

// variable is the name of a flag in the environment and in a file.
func variable(name string) string {
	return "RAILPROOF_" + strings.ToUpper(strings.ReplaceAll(name, "-", "_"))
}

// configure sets every flag that was not given, from the environment, else from the
// file that the configuration names.
func configure(flags *flag.FlagSet, file *string, env func(string) string) error {
	if *file == "" {
		*file = env(variable("config"))
	}
	lines := map[string]string{}
	if *file != "" {
		var err error
		if lines, err = settings(flags, *file); err != nil {
			return err
		}
	}
	given := map[string]bool{"config": true}
	flags.Visit(func(f *flag.Flag) { given[f.Name] = true })
	var failed error
	flags.VisitAll(func(f *flag.Flag) {
		key := variable(f.Name)
		value, from := env(key), key
		if value == "" {
			value, from = lines[key], *file+": "+key
		}
		if given[f.Name] || value == "" || failed != nil {
			return
		}
		if err := flags.Set(f.Name, value); err != nil {
			failed = fmt.Errorf("%s: %w", from, err)
		}
	})
	return failed
}

// settings reads a file of lines NAME=VALUE. Empty lines and those that begin with #
// are passed over; a name that is no flag is a mistake.
func settings(flags *flag.FlagSet, path string) (map[string]string, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	known := map[string]bool{}
	flags.VisitAll(func(f *flag.Flag) { known[variable(f.Name)] = true })
	found := map[string]string{}
	lines := bufio.NewScanner(f)
	for n := 1; lines.Scan(); n++ {
		text := strings.TrimSpace(lines.Text())
		if text == "" || strings.HasPrefix(text, "#") {
			continue
		}
		name, value, ok := strings.Cut(text, "=")
		name = strings.TrimSpace(name)
		if !ok || !known[name] {
			return nil, fmt.Errorf("%s: line %d: want RAILPROOF_NAME=VALUE with the name of a flag", path, n)
		}
		found[name] = strings.Trim(strings.TrimSpace(value), `"`)
	}
	return found, lines.Err()
}
