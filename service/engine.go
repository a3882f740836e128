package service

import (
	"runtime"
	"runtime/debug"
	"strings"

	"golang.org/x/sys/cpu"
)

// Version is the version of the engine. Same request, same version and same
// platform give the same bytes, so it moves whenever a figure can.
const Version = "0.1.0"

// Engine names what computed an answer.
type Engine struct {
	Name            string
	Version         string
	ContractVersion string
	Platform        string
}

// NewEngine describes this build on this machine under the contract's version.
func NewEngine(contractVersion string) Engine {
	return Engine{Name: "railproof", Version: Version, ContractVersion: contractVersion, Platform: platform()}
}

// platform names the operating system, the architecture and what of it changes
// rounding: the instruction-set level the compiler may fuse operations for, and
// the fused multiply-add that the exponential of the standard library uses where
// the processor has it.
func platform() string {
	p := []string{runtime.GOOS, runtime.GOARCH}
	if info, ok := debug.ReadBuildInfo(); ok {
		for _, s := range info.Settings {
			if s.Key == "GO"+strings.ToUpper(runtime.GOARCH) && s.Value != "" {
				p = append(p, s.Value)
			}
		}
	}
	if cpu.X86.HasAVX && cpu.X86.HasFMA {
		p = append(p, "fma")
	}
	return strings.Join(p, "-")
}
