package main

import (
	"bytes"
	"context"
	"errors"
	"io"
	"net"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strings"
	"sync"
	"sync/atomic"
	"syscall"
	"testing"
	"time"

	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/credentials/insecure"
	"google.golang.org/grpc/metadata"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/encoding/protojson"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// built is the server as users run it, built once.
var built = sync.OnceValues(func() (string, error) {
	directory, err := os.MkdirTemp("", "calandria")
	if err != nil {
		return "", err
	}
	binary := filepath.Join(directory, "server")
	text, err := exec.Command("go", "build", "-o", binary, ".").CombinedOutput()
	if err != nil {
		return "", &exec.Error{Name: string(text), Err: err}
	}
	return binary, nil
})

func TestMain(m *testing.M) {
	code := m.Run()
	if binary, err := built(); err == nil {
		_ = os.RemoveAll(filepath.Dir(binary))
	}
	os.Exit(code)
}

// freeAddress finds a port that is free now.
func freeAddress(t *testing.T) string {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer l.Close()
	return l.Addr().String()
}

// process is a server in a process of its own.
type process struct {
	*exec.Cmd
	doors
	out, log lockedBuffer
}

type lockedBuffer struct {
	mutex sync.Mutex
	text  bytes.Buffer
}

func (b *lockedBuffer) Write(p []byte) (int, error) {
	b.mutex.Lock()
	defer b.mutex.Unlock()
	return b.text.Write(p)
}

func (b *lockedBuffer) String() string {
	b.mutex.Lock()
	defer b.mutex.Unlock()
	return b.text.String()
}

func startProcess(t *testing.T, arguments ...string) *process {
	t.Helper()
	binary, err := built()
	if err != nil {
		t.Fatal(err)
	}
	p := &process{doors: doors{grpcAddress: freeAddress(t), httpURL: "http://" + freeAddress(t)}}
	arguments = append(arguments, "-grpc-listen", p.grpcAddress, "-http-listen", strings.TrimPrefix(p.httpURL, "http://"))
	p.Cmd = exec.Command(binary, arguments...)
	p.Stdout, p.Stderr = &p.out, &p.log
	if err := p.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = p.Process.Kill() })
	deadline := time.Now().Add(20 * time.Second)
	for time.Now().Before(deadline) {
		if response, err := http.Get(p.httpURL + "/readyz"); err == nil {
			_ = response.Body.Close()
			if response.StatusCode == http.StatusOK {
				return p
			}
		}
		time.Sleep(20 * time.Millisecond)
	}
	t.Fatalf("not ready: %s", p.log.String())
	return nil
}

// TestStopLosesNothing puts both doors under load, sends SIGTERM in the midst
// of it, and expects every request that reached the server to be answered
// whole: what fails must have been refused at the door.
func TestStopLosesNothing(t *testing.T) {
	if runtime.GOOS == "windows" {
		t.Skip("no SIGTERM on Windows")
	}
	p := startProcess(t)
	var request calandriav1.SolveEffectRequest
	if err := protojson.Unmarshal([]byte(`{`+good+`}`), &request); err != nil {
		t.Fatal(err)
	}
	connection, err := grpc.NewClient(p.grpcAddress, grpc.WithTransportCredentials(insecure.NewCredentials()))
	if err != nil {
		t.Fatal(err)
	}
	defer connection.Close()
	client := calandriav1.NewTrainServiceClient(connection)

	const callers = 16
	var answeredGRPC, answeredREST, refused, lost atomic.Int64
	var problems lockedBuffer
	stop := make(chan struct{})
	var group sync.WaitGroup
	run := func(call func() (done bool)) {
		group.Go(func() {
			for {
				select {
				case <-stop:
					return
				default:
				}
				if call() {
					return
				}
			}
		})
	}
	shared := overHTTP2()
	for i := range callers {
		run(func() bool {
			solution, err := client.SolveEffect(context.Background(), &request)
			switch {
			case err == nil && solution.GetEffect().GetAreaM2() > 0:
				answeredGRPC.Add(1)
				return false
			case status.Code(err) == codes.Unavailable && !strings.Contains(err.Error(), "EOF"):
				refused.Add(1) // a new call after the doors closed
			default:
				lost.Add(1)
				_, _ = io.WriteString(&problems, "gRPC: "+err.Error()+"\n")
			}
			return true
		})
		// A third of the callers open a connection for each request, a third
		// keep theirs, and a third share one over HTTP/2.
		client, fresh := shared, false
		if i%3 < 2 {
			fresh = i%3 == 0
			client = &http.Client{Transport: &http.Transport{DisableKeepAlives: fresh}}
		}
		run(func() bool {
			response, err := client.Post(p.httpURL+"/v1/effects:solve", "application/json", strings.NewReader(`{`+good+`}`))
			if err != nil {
				// A connection may be reset while it still waits to be taken
				// in, which is a refusal of a new one only.
				if strings.Contains(err.Error(), "connection refused") || fresh && strings.Contains(err.Error(), "connection reset") {
					refused.Add(1)
				} else {
					lost.Add(1)
					_, _ = io.WriteString(&problems, "REST: "+err.Error()+"\n")
				}
				return true
			}
			defer response.Body.Close()
			text, err := io.ReadAll(response.Body)
			if err != nil || response.StatusCode != http.StatusOK || !strings.HasSuffix(string(text), "}\n") {
				lost.Add(1)
				_, _ = io.WriteString(&problems, "REST: cut off: "+string(text)+"\n")
				return true
			}
			answeredREST.Add(1)
			return false
		})
	}
	time.Sleep(400 * time.Millisecond)
	if err := p.Process.Signal(syscall.SIGTERM); err != nil {
		t.Fatal(err)
	}
	ended := make(chan error, 1)
	go func() { ended <- p.Wait() }()
	select {
	case err := <-ended:
		if err != nil {
			t.Errorf("exit: %v\n%s", err, p.log.String())
		}
	case <-time.After(15 * time.Second):
		t.Fatalf("did not stop\n%s", p.log.String())
	}
	close(stop)
	group.Wait()
	t.Logf("answered over gRPC %d, over REST %d; refused at the door %d; lost %d", answeredGRPC.Load(), answeredREST.Load(), refused.Load(), lost.Load())
	if lost.Load() > 0 {
		t.Errorf("%d requests lost:\n%s", lost.Load(), problems.String())
	}
	if answeredGRPC.Load() == 0 || answeredREST.Load() == 0 {
		t.Error("no load before the stop")
	}
	// Every request that the server took in has its line.
	log := p.log.String()
	if lines := int64(strings.Count(log, "door=rest") - strings.Count(log, "/readyz")); lines != answeredREST.Load() {
		t.Errorf("the server answered %d requests over REST, callers got %d", lines, answeredREST.Load())
	}
	if lines := int64(strings.Count(log, "door=grpc")); lines != answeredGRPC.Load() {
		t.Errorf("the server answered %d calls over gRPC, callers got %d", lines, answeredGRPC.Load())
	}
}

// overHTTP2 is a client that sends all its requests over one connection.
func overHTTP2() *http.Client {
	protocols := new(http.Protocols)
	protocols.SetUnencryptedHTTP2(true)
	return &http.Client{Transport: &http.Transport{Protocols: protocols}}
}

// TestStopTurnsAwayBusyConnections keeps one request in flight over HTTP/2
// while others follow on its connection: at a stop these must soon be turned
// away, lest the stop wait for its deadline and cut the first one off.
func TestStopTurnsAwayBusyConnections(t *testing.T) {
	inside, release := make(chan struct{}), make(chan struct{})
	d := newDrain()
	protocols := new(http.Protocols)
	protocols.SetUnencryptedHTTP2(true)
	server := &http.Server{
		ConnState: d.watch, Protocols: protocols, ReadHeaderTimeout: time.Minute,
		Handler: d.telling(http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
			if r.URL.Path == "/long" {
				close(inside)
				<-release
			}
			_, _ = io.WriteString(w, "whole")
		})),
	}
	listener, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	served := make(chan error, 1)
	go func() { served <- server.Serve(listener) }()
	client, url := overHTTP2(), "http://"+listener.Addr().String()
	get := func(path string) (string, error) {
		response, err := client.Get(url + path)
		if err != nil {
			return "", err
		}
		defer response.Body.Close()
		text, err := io.ReadAll(response.Body)
		return string(text), err
	}
	long := make(chan string, 1)
	go func() {
		text, err := get("/long")
		if err != nil {
			text = err.Error()
		}
		long <- text
	}()
	<-inside
	finished := make(chan struct{})
	go func() {
		defer close(finished)
		d.finish(context.Background(), server, listener)
	}()
	patience := time.Now().Add(20 * time.Second)
	for {
		text, err := get("/short")
		if err != nil {
			if !strings.Contains(err.Error(), "connection refused") {
				t.Errorf("turned away with %v, want a refusal at the door", err)
			}
			break
		}
		if text != "whole" {
			t.Errorf("answered %q", text)
		}
		if time.Now().After(patience) {
			t.Error("still taken in during the stop")
			break
		}
		time.Sleep(time.Millisecond)
	}
	close(release)
	if text := <-long; text != "whole" {
		t.Errorf("the request in flight got %q", text)
	}
	<-finished
	if err := <-served; err != nil && !errors.Is(err, net.ErrClosed) && !errors.Is(err, http.ErrServerClosed) {
		t.Error(err)
	}
}

// TestOneLineForEachCall holds the log to one line a call, and lets no caller
// keep out of it by what it sends.
func TestOneLineForEachCall(t *testing.T) {
	p := startProcess(t)
	connection, err := grpc.NewClient(p.grpcAddress, grpc.WithTransportCredentials(insecure.NewCredentials()))
	if err != nil {
		t.Fatal(err)
	}
	defer connection.Close()
	ctx := metadata.AppendToOutgoingContext(t.Context(), "x-request-id", "line-grpc", "x-calandria-door", "rest", "x-forwarded-for", "127.0.0.1")
	if _, err := calandriav1.NewEngineServiceClient(connection).GetEngine(ctx, &calandriav1.GetEngineRequest{}); err != nil {
		t.Error(err)
	}
	request, err := http.NewRequestWithContext(t.Context(), http.MethodGet, p.httpURL+"/v1/engine", http.NoBody)
	if err != nil {
		t.Fatal(err)
	}
	request.Header.Set("X-Request-Id", "line-rest")
	response, err := http.DefaultClient.Do(request)
	if err != nil {
		t.Fatal(err)
	}
	if err := response.Body.Close(); err != nil {
		t.Error(err)
	}
	http.DefaultClient.CloseIdleConnections()
	if err := p.Process.Signal(syscall.SIGTERM); err != nil {
		t.Fatal(err)
	}
	if err := p.Wait(); err != nil {
		t.Error(err)
	}
	for _, door := range []string{"grpc", "rest"} {
		if n := strings.Count(p.log.String(), "door="+door+" id=line-"+door); n != 1 {
			t.Errorf("%d lines for the call over %s, want 1:\n%s", n, door, p.log.String())
		}
		if n := strings.Count(p.log.String(), "line-"+door); n != 1 {
			t.Errorf("the call over %s is named %d times, want once:\n%s", door, n, p.log.String())
		}
	}
}

func TestHealthcheckCommand(t *testing.T) {
	p := startProcess(t)
	binary, err := built()
	if err != nil {
		t.Fatal(err)
	}
	ask := func() error {
		command := exec.Command(binary, "healthcheck")
		command.Env = append(os.Environ(), "CALANDRIA_HTTP_LISTEN="+strings.TrimPrefix(p.httpURL, "http://"))
		return command.Run()
	}
	if err := ask(); err != nil {
		t.Errorf("while serving: %v", err)
	}
	if err := p.Process.Signal(syscall.SIGTERM); err != nil {
		t.Fatal(err)
	}
	if err := p.Wait(); err != nil {
		t.Error(err)
	}
	if ask() == nil {
		t.Error("healthy after the end")
	}
}

func TestStartProblemsAreNamed(t *testing.T) {
	binary, err := built()
	if err != nil {
		t.Fatal(err)
	}
	text, err := exec.Command(binary, "-grpc-listen", "nowhere", "-request-bytes", "-3", "-drain", "soon", "extra").CombinedOutput()
	if err == nil {
		t.Error("started")
	}
	for _, word := range []string{"-grpc-listen", "-request-bytes", "-drain", "extra"} {
		if !strings.Contains(string(text), word) {
			t.Errorf("%s is not named: %s", word, text)
		}
	}
	taken, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer taken.Close()
	text, err = exec.Command(binary, "-grpc-listen", taken.Addr().String(), "-http-listen", "127.0.0.1:0").CombinedOutput()
	if err == nil || !strings.Contains(string(text), "gRPC door can not open at "+taken.Addr().String()) {
		t.Errorf("%v: %s", err, text)
	}
}
