// Package telemetry gives every request an id and every answer one line in
// the log. It never logs what a request holds.
package telemetry

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"log/slog"
	"runtime/debug"
	"time"

	"github.com/fullstorydev/grpchan/inprocgrpc"
	"google.golang.org/grpc"
	"google.golang.org/grpc/metadata"
	"google.golang.org/grpc/peer"
	"google.golang.org/grpc/status"

	"calandria.example/calandria/server/statuses"
)

// IDHeader carries a request's id, as gRPC metadata and as an HTTP header.
const IDHeader = "x-request-id"

const longestID = 64

type idKey struct{}

// NewID makes an id of 16 hexadecimal digits.
func NewID() string {
	var b [8]byte
	// crypto/rand does not fail: the runtime ends the program instead.
	_, _ = rand.Read(b[:])
	return hex.EncodeToString(b[:])
}

// ValidID reports whether a caller's id may be used: 1 to 64 letters, digits,
// dots, dashes and underscores.
func ValidID(id string) bool {
	if id == "" || len(id) > longestID {
		return false
	}
	for i := range len(id) {
		c := id[i]
		switch {
		case c >= 'a' && c <= 'z', c >= 'A' && c <= 'Z', c >= '0' && c <= '9', c == '.', c == '-', c == '_':
		default:
			return false
		}
	}
	return true
}

// WithID puts a request's id into its context.
func WithID(ctx context.Context, id string) context.Context {
	return context.WithValue(ctx, idKey{}, id)
}

// ID reads a request's id from its context.
func ID(ctx context.Context) string {
	id, _ := ctx.Value(idKey{}).(string)
	return id
}

// Unary is the outermost interceptor. It names every call by an id, the
// caller's own if it is acceptable, returns it in the header, writes a line
// for each answer, and turns a panic anywhere inside into a status that shows
// the id only; value and stack go to the log. In the in-process channel a
// panic would otherwise end the program.
func Unary(log *slog.Logger) grpc.UnaryServerInterceptor {
	return func(ctx context.Context, request any, info *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (answer any, err error) {
		start := time.Now()
		id := incoming(ctx)
		ctx = WithID(ctx, id)
		defer func() {
			if v := recover(); v != nil {
				log.LogAttrs(ctx, slog.LevelError, "panic", slog.String("id", id), slog.String("method", info.FullMethod), slog.Any("value", v), slog.String("stack", string(debug.Stack())))
				answer, err = nil, statuses.Internal(id).Err()
			}
			// The REST face, the one caller within the process, writes a line
			// of its own. Metadata can not tell: any caller can send it.
			if inprocgrpc.ClientContext(ctx) == nil {
				line(ctx, log, id, info.FullMethod, err, time.Since(start))
			}
		}()
		// A header that can not be sent any more does not matter to the answer.
		_ = grpc.SetHeader(ctx, metadata.Pairs(IDHeader, id))
		return handler(ctx, request)
	}
}

func line(ctx context.Context, log *slog.Logger, id, method string, err error, took time.Duration) {
	s := status.Convert(err)
	attributes := []slog.Attr{
		slog.String("door", "grpc"), slog.String("id", id), slog.String("method", method),
		slog.String("code", s.Code().String()), slog.Duration("took", took),
	}
	if err != nil {
		attributes = append(attributes, slog.String("reason", statuses.Word(statuses.Reason(s))))
	}
	if p, ok := peer.FromContext(ctx); ok && p.Addr != nil {
		attributes = append(attributes, slog.String("peer", p.Addr.String()))
	}
	log.LogAttrs(ctx, slog.LevelInfo, "answered", attributes...)
}

// incoming returns the id that a call brought, or a new one.
func incoming(ctx context.Context) string {
	md, _ := metadata.FromIncomingContext(ctx)
	if given := md.Get(IDHeader); len(given) > 0 && ValidID(given[0]) {
		return given[0]
	}
	return NewID()
}
