package main

import (
	"context"
	"flag"
	"fmt"
	"runtime"
	"runtime/debug"

	"railproof/openapi"
	"railproof/service"
)

var versionCommand = &command{
	name: "version", summary: "version of engine, contract and build",
	about:   "Prints what computes the answers, as it stands in their engine field, and how it was built.",
	example: "railproof version",
	prepare: func(*flag.FlagSet) action {
		return func(_ context.Context, t terminal, _ []string) int {
			e := service.NewEngine(openapi.Load().Version())
			fmt.Fprintf(t.out, "%s %s\ncontract %s\nplatform %s\n%s\n", e.Name, e.Version, e.ContractVersion, e.Platform, runtime.Version())
			if info, ok := debug.ReadBuildInfo(); ok {
				for _, s := range info.Settings {
					if s.Key == "vcs.revision" || s.Key == "vcs.modified" {
						fmt.Fprintf(t.out, "%s %s\n", s.Key, s.Value)
					}
				}
			}
			return exitFine
		}
	},
}
