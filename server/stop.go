package main

import (
	"context"
	"net"
	"net/http"
	"sync"
	"time"

	"google.golang.org/grpc"
)

// drain lets the REST door finish what it has taken in. http.Server alone
// drops a request that arrives on a connection accepted just before Shutdown;
// so the listener closes first, connections that are open are served on and
// told to close, and only when all is quiet does the server shut down.
type drain struct {
	mutex    sync.Mutex
	open     map[net.Conn]connection
	draining bool
}

type connection struct {
	state http.ConnState
	since time.Time
}

func newDrain() *drain { return &drain{open: map[net.Conn]connection{}} }

// watch follows the states of connections.
func (d *drain) watch(c net.Conn, state http.ConnState) {
	d.mutex.Lock()
	defer d.mutex.Unlock()
	if state == http.StateClosed || state == http.StateHijacked {
		delete(d.open, c)
		return
	}
	d.open[c] = connection{state, time.Now()}
}

// telling adds to answers during a stop that the connection closes. Over
// HTTP/2 net/http makes a GOAWAY of that header: without it a caller with
// many requests on one connection would hold the stop up until its deadline.
func (d *drain) telling(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		d.mutex.Lock()
		draining := d.draining
		d.mutex.Unlock()
		if draining {
			w.Header().Set("Connection", "close")
		}
		next.ServeHTTP(w, r)
	})
}

// busy reports whether a connection holds a request, or may be about to send
// its first.
func (d *drain) busy() bool {
	const firstRequest = time.Second
	d.mutex.Lock()
	defer d.mutex.Unlock()
	for _, c := range d.open {
		if c.state == http.StateActive || c.state == http.StateNew && time.Since(c.since) < firstRequest {
			return true
		}
	}
	return false
}

// finish closes the listener, waits until all is quiet or ctx ends, and shuts
// the server down.
func (d *drain) finish(ctx context.Context, server *http.Server, listener net.Listener) {
	const (
		quiet = 250 * time.Millisecond // for callers that keep their connection
		pause = 10 * time.Millisecond
	)
	// It can only fail by being closed already. It closes before callers are
	// told to go, or those that come again at once would queue at a door that
	// shuts on them.
	_ = listener.Close()
	d.mutex.Lock()
	d.draining = true
	d.mutex.Unlock()
	least := time.Now().Add(quiet)
	for ctx.Err() == nil && (d.busy() || time.Now().Before(least)) {
		time.Sleep(pause)
	}
	if server.Shutdown(ctx) != nil {
		// The deadline passed: what is left is cut off.
		_ = server.Close()
	}
}

// stop lets both doors finish their requests side by side, and cuts off what
// is left after longest.
func stop(rest *http.Server, d *drain, restListener net.Listener, server *grpc.Server, longest time.Duration) {
	ctx, cancel := context.WithTimeout(context.Background(), longest)
	defer cancel()
	done := make(chan struct{})
	go func() {
		server.GracefulStop()
		close(done)
	}()
	d.finish(ctx, rest, restListener)
	select {
	case <-done:
	case <-ctx.Done():
		server.Stop()
		<-done
	}
}
