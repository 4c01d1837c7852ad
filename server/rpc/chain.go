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

	"calandria.example/calandria/engine"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/statuses"
	"calandria.example/calandria/server/telemetry"
)

// Chain returns the interceptors that every call passes, whichever door it
// came through, outermost first: id, log line and recovery, mapping of faults,
// time limit, size and unknown fields, the protos' own rules, the required
// version, and a look at the answer.
func Chain(log *slog.Logger, longest time.Duration, requestBytes int) ([]grpc.UnaryServerInterceptor, error) {
	validator, err := protovalidate.New(
		protovalidate.WithMessages(&calandriav1.GetSteamStateRequest{}, &calandriav1.GetSaturationRequest{}, &calandriav1.ComputeSteamStatesRequest{}, &calandriav1.SolveEffectRequest{}),
	)
	if err != nil {
		return nil, fmt.Errorf("rules of the protos: %w", err)
	}
	return []grpc.UnaryServerInterceptor{
		telemetry.Unary(log), mapFaults(log), limitTime(longest), checkShape(requestBytes), checkRules(validator), checkVersion, checkAnswer,
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

// checkShape refuses what a request may not be, whatever it says: larger than
// the limit, or with fields that this service does not know. A newer caller's
// field would otherwise be dropped, and the answer be to another question.
func checkShape(requestBytes int) grpc.UnaryServerInterceptor {
	return func(ctx context.Context, request any, _ *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
		if m, ok := request.(proto.Message); ok {
			if size := proto.Size(m); size > requestBytes {
				return nil, statuses.TooLarge("request", size, requestBytes).Err()
			}
			if path, unknown := unknownField(m.ProtoReflect()); unknown {
				subject := path
				if subject == "" {
					subject = "The request"
				}
				return nil, statuses.Invalid(&calandriav1.Violation{
					Field: path, Value: "a field of unknown number", Limit: "the fields of this version of the API",
					Detail: subject + " holds a field that this service does not know; call a newer service, or leave the field out.",
				}).Err()
			}
		}
		return handler(ctx, request)
	}
}

// unknownField finds a message with fields that the protos here do not have,
// and returns its path.
func unknownField(m protoreflect.Message) (path string, found bool) {
	if len(m.GetUnknown()) > 0 {
		return "", true
	}
	m.Range(func(d protoreflect.FieldDescriptor, v protoreflect.Value) bool {
		if d.Kind() != protoreflect.MessageKind {
			return true
		}
		look := func(name string, inner protoreflect.Message) {
			if below, is := unknownField(inner); is && !found {
				path, found = name, true
				if below != "" {
					path += "." + below
				}
			}
		}
		if d.IsList() {
			for i := range v.List().Len() {
				look(fmt.Sprintf("%s[%d]", d.Name(), i), v.List().Get(i).Message())
			}
		} else {
			look(string(d.Name()), v.Message())
		}
		return !found
	})
	return path, found
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

// checkVersion refuses a request that requires another version of the engine:
// its caller wants the same digits again.
func checkVersion(ctx context.Context, request any, _ *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
	if m, ok := request.(interface{ GetRequireEngineVersion() string }); ok {
		if required := m.GetRequireEngineVersion(); required != "" && required != engine.Version {
			return nil, statuses.VersionMismatch("require_engine_version", required, engine.Version).Err()
		}
	}
	return handler(ctx, request)
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
