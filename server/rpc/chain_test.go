package rpc

import (
	"context"
	"errors"
	"log/slog"
	"math"
	"strings"
	"testing"
	"time"

	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/metadata"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/proto"

	"calandria.example/calandria/engine/fault"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/statuses"
)

// through sends a request to a handler through the whole chain.
func through(t *testing.T, log *strings.Builder, request proto.Message, handler grpc.UnaryHandler) (any, error) {
	t.Helper()
	chain, err := Chain(slog.New(slog.NewTextHandler(log, nil)), time.Minute, 1<<20)
	if err != nil {
		t.Fatal(err)
	}
	ctx := metadata.NewIncomingContext(t.Context(), metadata.Pairs("x-request-id", "test-1"))
	info := &grpc.UnaryServerInfo{FullMethod: "/test"}
	for i := len(chain) - 1; i >= 0; i-- {
		inner, interceptor := handler, chain[i]
		handler = func(ctx context.Context, request any) (any, error) { return interceptor(ctx, request, info, inner) }
	}
	return handler(ctx, request)
}

func TestWhatHandlersDo(t *testing.T) {
	for _, c := range []struct {
		name    string
		handler grpc.UnaryHandler
		code    codes.Code
		reason  calandriav1.Reason
		hidden  string // must stand in the log and not in the status
	}{
		{"panic", func(context.Context, any) (any, error) { panic("kept secret") }, codes.Internal, calandriav1.Reason_REASON_INTERNAL, "kept secret"},
		{"unknown error", func(context.Context, any) (any, error) { return nil, errors.New("kept secret") }, codes.Internal, calandriav1.Reason_REASON_INTERNAL, "kept secret"},
		{"unknown error among faults", func(context.Context, any) (any, error) {
			return nil, errors.Join(&fault.Invalid{Field: "a"}, errors.New("kept secret"))
		}, codes.Internal, calandriav1.Reason_REASON_INTERNAL, "kept secret"},
		{"not a number", func(context.Context, any) (any, error) {
			return &calandriav1.Saturation{Liquid: &calandriav1.SteamState{SpeedOfSoundMPerS: proto.Float64(math.NaN())}}, nil
		}, codes.Internal, calandriav1.Reason_REASON_INTERNAL, "liquid.speed_of_sound_m_per_s is not finite"},
		{"infinite in a list", func(context.Context, any) (any, error) {
			return &calandriav1.EffectSolution{DefaultsApplied: []*calandriav1.DefaultApplied{{Value: math.Inf(1)}}}, nil
		}, codes.Internal, calandriav1.Reason_REASON_INTERNAL, "defaults_applied.value is not finite"},
		{"given up", func(context.Context, any) (any, error) { return nil, context.Canceled }, codes.Canceled, calandriav1.Reason_REASON_CANCELED, ""},
		{"out of time", func(context.Context, any) (any, error) { return nil, context.DeadlineExceeded }, codes.DeadlineExceeded, calandriav1.Reason_REASON_DEADLINE, ""},
		{"range", func(context.Context, any) (any, error) {
			return nil, &fault.Range{Quantity: "temperature_c", Unit: "K", Source: "a release", Value: 700, Min: 273.15, Max: 623.15}
		}, codes.InvalidArgument, calandriav1.Reason_REASON_OUTSIDE_CORRELATION, ""},
		{"not converged", func(context.Context, any) (any, error) {
			return nil, &fault.NotConverged{Iterations: 9, Residual: 0.1, Where: "mass balance"}
		}, codes.FailedPrecondition, calandriav1.Reason_REASON_NOT_CONVERGED, ""},
	} {
		t.Run(c.name, func(t *testing.T) {
			var log strings.Builder
			answer, err := through(t, &log, &calandriav1.GetEngineRequest{}, c.handler)
			s := status.Convert(err)
			if answer != nil || s.Code() != c.code || statuses.Reason(s) != c.reason {
				t.Errorf("%v %v", answer, err)
			}
			if c.hidden != "" && (strings.Contains(s.String(), c.hidden) || strings.Contains(s.String(), "goroutine") || !strings.Contains(log.String(), c.hidden) || !strings.Contains(s.Message(), "test-1")) {
				t.Errorf("the status %v must show the id only, the log the rest: %s", s, log.String())
			}
		})
	}
}

// TestLimitsInWords looks at how a range is worded: in the units of the API.
func TestLimitsInWords(t *testing.T) {
	var log strings.Builder
	_, err := through(t, &log, &calandriav1.GetEngineRequest{}, func(context.Context, any) (any, error) {
		return nil, &fault.Range{Quantity: "temperature_c", Unit: "K", Source: "a release", Value: 700, Min: 273.15, Max: 623.15}
	})
	violations := statuses.Violations(status.Convert(err))
	if len(violations) != 1 || violations[0].GetField() != "temperature_c" || violations[0].GetLimit() != "0 to 350 degC" || violations[0].GetValue() != "426.85 degC" {
		t.Errorf("%v", violations)
	}
}

// TestRulesApply sends what the protos' own rules refuse.
func TestRulesApply(t *testing.T) {
	var log strings.Builder
	reached := false
	_, err := through(t, &log, &calandriav1.GetSaturationRequest{PressureKpaAbs: proto.Float64(math.NaN()), TemperatureC: proto.Float64(-3)}, func(context.Context, any) (any, error) {
		reached = true
		return nil, nil
	})
	violations := statuses.Violations(status.Convert(err))
	if reached || len(violations) != 2 {
		t.Errorf("%v %v", reached, err)
	}
}

func TestTooLateFromTheStart(t *testing.T) {
	chain, err := Chain(slog.New(slog.DiscardHandler), 0, 1<<20)
	if err != nil {
		t.Fatal(err)
	}
	_, err = chain[2](t.Context(), nil, nil, func(context.Context, any) (any, error) { return nil, nil })
	if !errors.Is(err, context.DeadlineExceeded) {
		t.Errorf("%v", err)
	}
}

// TestManyStatesEndWithTheCaller gives many states to a caller who has gone:
// the work stops at the next look at the clock, without an answer.
func TestManyStatesEndWithTheCaller(t *testing.T) {
	request := &calandriav1.ComputeSteamStatesRequest{PressureKpaAbs: make([]float64, 20_000), TemperatureC: make([]float64, 20_000)}
	ctx := &going{Context: t.Context(), looks: 3}
	answer, err := (&Services{}).ComputeSteamStates(ctx, request)
	if answer != nil || !errors.Is(err, context.DeadlineExceeded) || ctx.looks != 0 {
		t.Errorf("%v %v, %d looks left", answer, err, ctx.looks)
	}
}

// going is a context that ends after so many looks at it.
type going struct {
	context.Context
	looks int
}

func (g *going) Err() error {
	if g.looks == 0 {
		return context.DeadlineExceeded
	}
	g.looks--
	return nil
}
