package main

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"strings"
	"sync/atomic"
	"time"

	"github.com/fullstorydev/grpchan/inprocgrpc"
	"google.golang.org/grpc"
	"google.golang.org/grpc/health"
	healthpb "google.golang.org/grpc/health/grpc_health_v1"
	"google.golang.org/grpc/keepalive"
	"google.golang.org/grpc/reflection"

	"calandria.example/calandria/engine"
	"calandria.example/calandria/engine/vetting"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/gateway"
	"calandria.example/calandria/server/rpc"
	"calandria.example/calandria/server/settings"
)

// Limits that no setting changes.
const (
	jsonDepth     = 16
	targetBytes   = 8192
	answerSeconds = 30
	// transportTimes is how many times the largest request the transport takes
	// in, so that the chain can say what is wrong with it.
	transportTimes = 4
)

// doors are both doors of a service that is up.
type doors struct {
	grpcAddress, httpURL string
}

// errUnvetted says that the engine does not reproduce its published values.
var errUnvetted = errors.New("the engine does not reproduce published values; it will not serve")

// serve opens both doors, tells up where they are, and serves until ctx ends;
// then it lets requests in flight finish. checks are the published values,
// recomputed; with one of them failed it refuses to serve.
func serve(ctx context.Context, s settings.Settings, log *slog.Logger, checks []vetting.Result, up func(doors)) error {
	if failed := vetting.Failures(checks); len(failed) > 0 {
		return fmt.Errorf("%w:\n%s", errUnvetted, strings.Join(failed, "\n"))
	}
	chain, err := rpc.Chain(log, answerSeconds*time.Second, s.RequestBytes)
	if err != nil {
		return err
	}
	services := &rpc.Services{Limits: &calandriav1.Limits{
		RequestBytes: int32(s.RequestBytes), JsonDepth: jsonDepth, RequestTargetBytes: targetBytes, AnswerSeconds: answerSeconds,
	}}

	grpcServer := grpc.NewServer(
		grpc.ChainUnaryInterceptor(chain...),
		// The transport refuses in its own words, with a code that invites a
		// retry; up to this bound the chain refuses first, in ours.
		grpc.MaxRecvMsgSize(transportTimes*s.RequestBytes),
		grpc.KeepaliveParams(keepalive.ServerParameters{MaxConnectionIdle: 15 * time.Minute, MaxConnectionAge: 30 * time.Minute, MaxConnectionAgeGrace: time.Minute}),
		grpc.KeepaliveEnforcementPolicy(keepalive.EnforcementPolicy{MinTime: 10 * time.Second, PermitWithoutStream: true}),
	)
	services.Register(grpcServer)
	state := health.NewServer()
	healthpb.RegisterHealthServer(grpcServer, state)
	reflection.Register(grpcServer)

	channel := (&inprocgrpc.Channel{}).WithServerUnaryInterceptor(chained(chain))
	services.Register(channel)
	var ready atomic.Bool
	rest, err := gateway.New(channel, gateway.Limits{RequestBytes: s.RequestBytes, JSONDepth: jsonDepth, TargetBytes: targetBytes}, ready.Load, log)
	if err != nil {
		return err
	}
	protocols := new(http.Protocols)
	protocols.SetHTTP1(true)
	protocols.SetUnencryptedHTTP2(true)
	connections := newDrain()
	httpServer := &http.Server{
		Handler: connections.telling(rest), ConnState: connections.watch, Protocols: protocols,
		ReadHeaderTimeout: 10 * time.Second, ReadTimeout: time.Minute, WriteTimeout: 2 * time.Minute, IdleTimeout: 2 * time.Minute,
		MaxHeaderBytes: 64 << 10,
		ErrorLog:       slog.NewLogLogger(log.Handler(), slog.LevelWarn),
	}

	grpcListener, err := listen(ctx, "gRPC", s.GRPCListen)
	if err != nil {
		return err
	}
	httpListener, err := listen(ctx, "REST", s.HTTPListen)
	if err != nil {
		return errors.Join(err, grpcListener.Close())
	}
	warnExposed(log, grpcListener, httpListener)

	ended := make(chan error, 2)
	go func() { ended <- grpcServer.Serve(grpcListener) }()
	go func() {
		err := httpServer.Serve(httpListener)
		if errors.Is(err, http.ErrServerClosed) || errors.Is(err, net.ErrClosed) {
			err = nil
		}
		ended <- err
	}()
	ready.Store(true)
	for _, name := range append([]string{""}, rpc.Names...) {
		state.SetServingStatus(name, healthpb.HealthCheckResponse_SERVING)
	}
	log.Info("serving", "engine", engine.Version, "grpc", grpcListener.Addr().String(), "rest", httpListener.Addr().String(), "published_values", len(checks))
	if up != nil {
		go up(doors{grpcListener.Addr().String(), "http://" + httpListener.Addr().String()})
	}

	var failure error
	select {
	case <-ctx.Done():
	case failure = <-ended:
	}
	log.Info("stopping: finishing what is in flight", "at_most", s.Drain)
	ready.Store(false)
	state.Shutdown()
	stop(httpServer, connections, httpListener, grpcServer, s.Drain)
	log.Info("stopped")
	return failure
}

func listen(ctx context.Context, door, address string) (net.Listener, error) {
	listener, err := (&net.ListenConfig{}).Listen(ctx, "tcp", address)
	if err != nil {
		return nil, fmt.Errorf("the %s door can not open at %s (taken already, or not an address of this machine?): %w", door, address, err)
	}
	return listener, nil
}

// warnExposed says when a door can be reached from other machines: there is
// no encryption here, that belongs to what stands in front.
func warnExposed(log *slog.Logger, listeners ...net.Listener) {
	for _, l := range listeners {
		if a, ok := l.Addr().(*net.TCPAddr); ok && !a.IP.IsLoopback() {
			log.Warn("reachable from other machines without encryption or log-in; put a proxy with both in front", "address", a.String())
		}
	}
}

// chained joins interceptors to one, outermost first, as the in-process
// channel takes it.
func chained(chain []grpc.UnaryServerInterceptor) grpc.UnaryServerInterceptor {
	return func(ctx context.Context, request any, info *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
		for i := len(chain) - 1; i >= 0; i-- {
			inner, interceptor := handler, chain[i]
			handler = func(ctx context.Context, request any) (any, error) {
				return interceptor(ctx, request, info, inner)
			}
		}
		return handler(ctx, request)
	}
}
