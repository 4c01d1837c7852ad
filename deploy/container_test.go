// Package deploy tries the container for real, where the tools for it are
// installed.
package deploy

import (
	"bytes"
	"context"
	"io"
	"net"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"google.golang.org/grpc"
	"google.golang.org/grpc/credentials/insecure"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// tools runs buildah and podman on a store of the test's own, with what a
// machine without systemd and without all capabilities needs.
type tools struct {
	t     *testing.T
	store []string
}

func (c *tools) run(name string, arguments ...string) string {
	c.t.Helper()
	ctx, cancel := context.WithTimeout(context.Background(), 2*time.Minute)
	defer cancel()
	all := append(append([]string{}, c.store...), arguments...)
	if name == "podman" {
		all = append([]string{"--cgroup-manager=cgroupfs", "--events-backend=file", "--runtime", "/usr/sbin/runc"}, all...)
	}
	command := exec.CommandContext(ctx, name, all...)
	var out, problems bytes.Buffer
	command.Stdout, command.Stderr = &out, &problems
	if err := command.Run(); err != nil {
		c.t.Fatalf("%s %v: %v\n%s%s", name, arguments, err, out.String(), problems.String())
	}
	return strings.TrimSpace(out.String())
}

func freePort(t *testing.T) string {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	_, port, err := net.SplitHostPort(l.Addr().String())
	if err != nil {
		t.Fatal(err)
	}
	return port
}

// TestContainer builds the image, runs it locked down, asks both doors from
// outside, and stops it.
func TestContainer(t *testing.T) {
	for _, tool := range []string{"buildah", "podman", "/usr/sbin/runc"} {
		if _, err := exec.LookPath(tool); err != nil {
			t.Skipf("the container was NOT tried: %s is not installed here", tool)
		}
	}
	if os.Geteuid() != 0 {
		t.Skip("the container was NOT tried: it takes root here")
	}
	place := t.TempDir()
	build := exec.Command("go", "build", "-trimpath", "-ldflags=-s -w", "-o", filepath.Join(place, "bin", "calandria"), "../server")
	build.Env = append(os.Environ(), "CGO_ENABLED=0")
	if text, err := build.CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, text)
	}
	c := &tools{t, []string{"--root", place + "/store", "--runroot", place + "/run", "--storage-driver", "vfs"}}
	c.run("buildah", "bud", "--isolation=chroot", "--format", "docker", "--target", "prebuilt", "-t", "calandria:test", "-f", "Dockerfile", place)

	grpcPort, httpPort := freePort(t), freePort(t)
	started := time.Now()
	id := c.run("podman", "run", "-d",
		"--ulimit", "nofile=1024:1024", "--ulimit", "nproc=1024:1024",
		"-p", "127.0.0.1:"+httpPort+":8080", "-p", "127.0.0.1:"+grpcPort+":50051",
		"--read-only", "--read-only-tmpfs=false", "--cap-drop=all", "--security-opt=no-new-privileges",
		"--memory", "256m", "--pids-limit", "128", "--health-interval=disable", "calandria:test")
	t.Cleanup(func() { c.run("podman", "rm", "-f", id) })
	url := "http://127.0.0.1:" + httpPort
	get := func(path string) (string, error) {
		response, err := http.Get(url + path)
		if err != nil {
			return "", err
		}
		defer response.Body.Close()
		text, err := io.ReadAll(response.Body)
		return string(text), err
	}
	for {
		if text, err := get("/readyz"); err == nil && text == "ok\n" {
			break
		}
		if time.Since(started) > 30*time.Second {
			t.Fatalf("not ready: %s", c.run("podman", "logs", id))
		}
		time.Sleep(10 * time.Millisecond)
	}
	t.Logf("ready %v after podman run; image %s bytes", time.Since(started).Round(time.Millisecond), c.run("podman", "image", "inspect", "calandria:test", "--format", "{{.Size}}"))

	overREST, err := get("/v1/steam/saturation?temperature_c=100&pick=latent_heat_kj_per_kg")
	if err != nil || !strings.HasPrefix(overREST, "2256.") { // common practice: near 2257 kJ/kg
		t.Errorf("REST: %q %v", overREST, err)
	}
	connection, err := grpc.NewClient("127.0.0.1:"+grpcPort, grpc.WithTransportCredentials(insecure.NewCredentials()))
	if err != nil {
		t.Fatal(err)
	}
	defer connection.Close()
	verification, err := calandriav1.NewEngineServiceClient(connection).VerifyEngine(t.Context(), &calandriav1.VerifyEngineRequest{})
	if err != nil || !verification.GetPassed() {
		t.Errorf("gRPC: %v %v", verification, err)
	}
	c.run("podman", "healthcheck", "run", id)
	if got := c.run("podman", "inspect", id, "--format", "{{.Config.User}} {{.HostConfig.ReadonlyRootfs}} {{.State.Health.Status}}"); got != "65532:65532 true healthy" {
		t.Errorf("user, read-only root, health: %s", got)
	}
	c.run("podman", "stop", "-t", "10", id)
	if got := c.run("podman", "inspect", id, "--format", "{{.State.ExitCode}}"); got != "0" {
		t.Errorf("exit status %s after SIGTERM", got)
	}
}
