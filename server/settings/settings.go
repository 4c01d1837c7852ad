// Package settings reads flags and environment, and nothing else does.
package settings

import (
	"errors"
	"flag"
	"fmt"
	"io"
	"net"
	"strconv"
	"strings"
	"time"
)

// Settings are what the service can be told. Flags win over environment.
type Settings struct {
	GRPCListen   string        // address of the gRPC door
	HTTPListen   string        // address of the REST door
	RequestBytes int           // largest request
	Drain        time.Duration // longest wait for requests in flight at a stop
	Demo         bool          // solve the demo scenario before serving on
}

// Setting describes one setting for people.
type Setting struct {
	Flag, Environment, Default, Meaning string
}

// All lists the settings, in the order of the README's table.
func All() []Setting {
	return []Setting{
		{"-grpc-listen", "CALANDRIA_GRPC_LISTEN", "127.0.0.1:50051", "address of the gRPC door"},
		{"-http-listen", "CALANDRIA_HTTP_LISTEN", "127.0.0.1:8080", "address of the REST door"},
		{"-request-bytes", "CALANDRIA_REQUEST_BYTES", "1048576", "largest request, in bytes, at either door"},
		{"-drain", "CALANDRIA_DRAIN", "10s", "longest wait at a stop for requests in flight"},
		{"-demo", "", "false", "solve the demo scenario first, then serve on"},
	}
}

// Read reads arguments (without the program's name) over an environment. It
// lists every problem at once. flag.ErrHelp means that help was asked for and
// written to out.
func Read(arguments []string, environment func(string) string, out io.Writer) (Settings, error) {
	var s Settings
	values := map[string]string{}
	for _, setting := range All() {
		values[setting.Flag] = setting.Default
		if setting.Environment != "" {
			if v := environment(setting.Environment); v != "" {
				values[setting.Flag] = v
			}
		}
	}
	flags := flag.NewFlagSet("server", flag.ContinueOnError)
	flags.SetOutput(out)
	flags.Usage = func() {
		fmt.Fprintln(out, "usage: server [flags]     serve\n       server healthcheck  ask the server at CALANDRIA_HTTP_LISTEN whether it is ready (exit status 0 or 1)\n\nflags:")
		for _, setting := range All() {
			fmt.Fprintf(out, "  %-16s %s (default %s", setting.Flag, setting.Meaning, setting.Default)
			if setting.Environment != "" {
				fmt.Fprintf(out, ", or %s", setting.Environment)
			}
			fmt.Fprintln(out, ")")
		}
	}
	for _, setting := range All() {
		name := strings.TrimPrefix(setting.Flag, "-")
		if name == "demo" {
			flags.BoolVar(&s.Demo, name, false, setting.Meaning)
			continue
		}
		flags.Func(name, setting.Meaning, func(v string) error { values[setting.Flag] = v; return nil })
	}
	if err := flags.Parse(arguments); err != nil {
		return s, err
	}
	var problems []error
	if flags.NArg() > 0 {
		problems = append(problems, fmt.Errorf("unknown argument %q; flags start with -", flags.Arg(0)))
	}
	s.GRPCListen, s.HTTPListen = values["-grpc-listen"], values["-http-listen"]
	for _, name := range []string{"-grpc-listen", "-http-listen"} {
		if _, port, err := net.SplitHostPort(values[name]); err != nil || !portOK(port) {
			problems = append(problems, fmt.Errorf("%s is %q: give host:port, such as 127.0.0.1:8080", name, values[name]))
		}
	}
	if s.GRPCListen == s.HTTPListen && !strings.HasSuffix(s.GRPCListen, ":0") {
		problems = append(problems, fmt.Errorf("-grpc-listen and -http-listen are both %q: give each its own port", s.GRPCListen))
	}
	const smallest, largest = 1 << 10, 64 << 20
	n, err := strconv.Atoi(values["-request-bytes"])
	if err != nil || n < smallest || n > largest {
		problems = append(problems, fmt.Errorf("-request-bytes is %q: give a whole number from %d to %d", values["-request-bytes"], smallest, largest))
	}
	s.RequestBytes = n
	s.Drain, err = time.ParseDuration(values["-drain"])
	if err != nil || s.Drain < 0 || s.Drain > time.Hour {
		problems = append(problems, fmt.Errorf("-drain is %q: give a time from 0s to 1h, such as 10s", values["-drain"]))
	}
	return s, errors.Join(problems...)
}

func portOK(port string) bool {
	n, err := strconv.Atoi(port)
	return err == nil && n >= 0 && n <= 65535
}

// HTTPAddress reads only where the REST door is, for a health check from
// beside a running server.
func HTTPAddress(environment func(string) string) string {
	for _, setting := range All() {
		if setting.Flag == "-http-listen" {
			if v := environment(setting.Environment); v != "" {
				return v
			}
			return setting.Default
		}
	}
	return ""
}
