package rpc

import (
	"context"
	"fmt"
	"log/slog"
	"math"
	"time"

	"buf.build/go/protovalidate"
	"google.golang.org/grpc"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/statuses"
	"calandria.example/calandria/server/telemetry"
)

// Chain returns the interceptors that every call passes, whichever door it
// came through, outermost first: id, log line and recovery, mapping of faults,
// time limit, the protos' own rules, and a look at the answer.
func Chain(log *slog.Logger, longest time.Duration) ([]grpc.UnaryServerInterceptor, error) {
	validator, err := protovalidate.New(
		protovalidate.WithMessages(&calandriav1.GetSteamStateRequest{}, &calandriav1.GetSaturationRequest{}, &calandriav1.SolveEffectRequest{}),
	)
	if err != nil {
		return nil, fmt.Errorf("rules of the protos: %w", err)
	}
	return []grpc.UnaryServerInterceptor{
		telemetry.Unary(log), mapFaults(log), limitTime(longest), checkRules(validator), checkAnswer,
	}, nil
}

// mapFaults turns what handlers return into statuses. What it does not know
// it hides, and logs.
func mapFaults(log *slog.Logger) grpc.UnaryServerInterceptor {
	return func(ctx context.Context, request any, info *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
		answer, err := handler(ctx, request)
		if err == nil {
			return answer, nil
		}
		s, known := statuses.From(err, telemetry.ID(ctx))
		if !known {
			log.LogAttrs(ctx, slog.LevelError, "fault of the service", slog.String("id", telemetry.ID(ctx)), slog.String("method", info.FullMethod), slog.String("error", err.Error()))
		}
		return nil, s.Err()
	}
}

func limitTime(longest time.Duration) grpc.UnaryServerInterceptor {
	return func(ctx context.Context, request any, _ *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
		ctx, cancel := context.WithTimeout(ctx, longest)
		defer cancel()
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		return handler(ctx, request)
	}
}

func checkRules(validator protovalidate.Validator) grpc.UnaryServerInterceptor {
	return func(ctx context.Context, request any, _ *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
		if m, ok := request.(proto.Message); ok {
			if err := validator.Validate(m); err != nil {
				violations, ok := statuses.FromValidation(err, m.ProtoReflect().Descriptor())
				if !ok {
					return nil, err
				}
				return nil, statuses.Invalid(violations...).Err()
			}
		}
		return handler(ctx, request)
	}
}

// checkAnswer lets no number out that is not one.
func checkAnswer(ctx context.Context, request any, _ *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
	answer, err := handler(ctx, request)
	if err != nil {
		return nil, err
	}
	if m, ok := answer.(proto.Message); ok {
		if field := notFinite(m.ProtoReflect()); field != "" {
			return nil, fmt.Errorf("answer %s is not finite", field)
		}
	}
	return answer, nil
}

// notFinite returns the name of a field that is NaN or infinite, "" if none.
func notFinite(m protoreflect.Message) (field string) {
	m.Range(func(d protoreflect.FieldDescriptor, v protoreflect.Value) bool {
		single := func(v protoreflect.Value) {
			switch d.Kind() {
			case protoreflect.DoubleKind:
				if f := v.Float(); math.IsNaN(f) || math.IsInf(f, 0) {
					field = string(d.Name())
				}
			case protoreflect.MessageKind:
				if inner := notFinite(v.Message()); inner != "" {
					field = string(d.Name()) + "." + inner
				}
			}
		}
		if d.IsList() {
			for i := range v.List().Len() {
				single(v.List().Get(i))
			}
		} else {
			single(v)
		}
		return field == ""
	})
	return field
}
