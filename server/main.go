// Command server serves the evaporator engine over gRPC and REST.
package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"os"
	"os/signal"
	"syscall"
	"time"

	"calandria.example/calandria/engine/vetting"
	"calandria.example/calandria/server/demo"
	"calandria.example/calandria/server/settings"
)

func main() {
	os.Exit(run(os.Args[1:]))
}

func run(arguments []string) int {
	if len(arguments) > 0 && arguments[0] == "healthcheck" {
		return healthcheck(settings.HTTPAddress(os.Getenv))
	}
	s, err := settings.Read(arguments, os.Getenv, os.Stderr)
	if errors.Is(err, flag.ErrHelp) {
		return 0
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		return 2
	}
	log := slog.New(slog.NewTextHandler(os.Stderr, nil))
	ctx, release := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer release()
	// A second signal ends the program at once.
	context.AfterFunc(ctx, release)
	up := func(d doors) {
		if !s.Demo {
			return
		}
		if err := demo.Run(ctx, d.grpcAddress, d.httpURL, os.Stdout); err != nil {
			fmt.Fprintln(os.Stderr, "demo:", err)
		}
	}
	if err := serve(ctx, s, log, vetting.Run(), up); err != nil {
		fmt.Fprintln(os.Stderr, err)
		return 1
	}
	return 0
}

// healthcheck asks the server beside it whether it is ready.
func healthcheck(address string) int {
	host, port, err := net.SplitHostPort(address)
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		return 1
	}
	if ip := net.ParseIP(host); host == "" || ip != nil && ip.IsUnspecified() {
		host = "127.0.0.1"
	}
	client := &http.Client{Timeout: 3 * time.Second}
	response, err := client.Get("http://" + net.JoinHostPort(host, port) + "/readyz")
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		return 1
	}
	defer response.Body.Close()
	if response.StatusCode != http.StatusOK {
		fmt.Fprintln(os.Stderr, "not ready:", response.Status)
		return 1
	}
	return 0
}
