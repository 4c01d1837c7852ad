// Package gateway is the REST face of the service: HTTP and JSON in front of
// the same calls, through the same interceptors. It is strict: whatever it can
// not understand wholly it refuses, and says all that is wrong at once.
package gateway

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"log/slog"
	"mime"
	"net/http"
	"net/url"
	"runtime/debug"
	"strconv"
	"strings"
	"time"

	"github.com/grpc-ecosystem/grpc-gateway/v2/runtime"
	"google.golang.org/grpc"
	"google.golang.org/grpc/metadata"
	"google.golang.org/protobuf/encoding/protojson"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	gen "calandria.example/calandria/server/gateway/gen/calandria/v1"
	"calandria.example/calandria/server/statuses"
	"calandria.example/calandria/server/telemetry"
)

// Limits are what the REST face refuses to exceed.
type Limits struct {
	RequestBytes int // of a body
	JSONDepth    int // of a body
	TargetBytes  int // of path and query
}

// Gateway is the handler of the REST face.
type Gateway struct {
	mux    *runtime.ServeMux
	routes []route
	pages  map[string]page
	limits Limits
	ready  func() bool
	log    *slog.Logger
}

// page is a fixed answer.
type page struct {
	contentType string
	body        []byte
	fleeting    bool
}

// New puts a REST face before channel. ready tells whether the service takes
// requests.
func New(channel grpc.ClientConnInterface, limits Limits, ready func() bool, log *slog.Logger) (*Gateway, error) {
	g := &Gateway{limits: limits, ready: ready, log: log, routes: routesOf()}
	g.mux = runtime.NewServeMux(
		runtime.WithMarshalerOption(runtime.MIMEWildcard, &runtime.JSONPb{
			MarshalOptions: protojson.MarshalOptions{UseProtoNames: true, EmitDefaultValues: true},
		}),
		runtime.WithErrorHandler(g.fail),
		runtime.WithIncomingHeaderMatcher(func(string) (string, bool) { return "", false }),
		runtime.WithOutgoingHeaderMatcher(func(string) (string, bool) { return "", false }),
		runtime.WithOutgoingTrailerMatcher(func(string) (string, bool) { return "", false }),
		runtime.WithMetadata(func(_ context.Context, r *http.Request) metadata.MD {
			return metadata.Pairs(telemetry.IDHeader, telemetry.ID(r.Context()))
		}),
		runtime.WithDisablePathLengthFallback(),
	)
	ctx := context.Background()
	for _, err := range []error{
		gen.RegisterSteamServiceHandlerClient(ctx, g.mux, calandriav1.NewSteamServiceClient(channel)),
		gen.RegisterTrainServiceHandlerClient(ctx, g.mux, calandriav1.NewTrainServiceClient(channel)),
		gen.RegisterEngineServiceHandlerClient(ctx, g.mux, calandriav1.NewEngineServiceClient(channel)),
	} {
		if err != nil {
			return nil, fmt.Errorf("gateway: %w", err)
		}
	}
	g.pages = map[string]page{
		"/":             {"text/plain; charset=utf-8", index(g.routes), false},
		"/openapi.json": {"application/json; charset=utf-8", openAPI, false},
		"/healthz":      {"text/plain; charset=utf-8", []byte("ok\n"), true},
		"/readyz":       {"text/plain; charset=utf-8", []byte("ok\n"), true},
	}
	return g, nil
}

// index lists the paths for a person who opens the address in a browser.
func index(routes []route) []byte {
	var b strings.Builder
	b.WriteString("Calandria: evaporator calculations over REST. Description for programs: /openapi.json\n\n")
	for i := range routes {
		fmt.Fprintf(&b, "%-5s %s\n", routes[i].method, routes[i].path())
	}
	b.WriteString("GET   /healthz\nGET   /readyz\n")
	return []byte(b.String())
}

// answer collects what a request gets, so that errors, ETag and pick can be
// settled before the first byte leaves.
type answer struct {
	header   http.Header
	status   int
	body     bytes.Buffer
	reason   string // word of the reason of a failure, for the log
	fleeting bool   // true of this moment only: not to be kept
}

func (a *answer) Header() http.Header { return a.header }

func (a *answer) WriteHeader(status int) {
	if a.status == 0 {
		a.status = status
	}
}

func (a *answer) Write(b []byte) (int, error) {
	a.WriteHeader(http.StatusOK)
	return a.body.Write(b)
}

// ServeHTTP answers one request and writes one line about it.
func (g *Gateway) ServeHTTP(w http.ResponseWriter, r *http.Request) {
	start := time.Now()
	id := r.Header.Get(telemetry.IDHeader)
	if !telemetry.ValidID(id) {
		id = telemetry.NewID()
	}
	r = r.WithContext(telemetry.WithID(r.Context(), id))
	a := &answer{header: http.Header{}}
	g.guarded(a, r)
	h := w.Header()
	for name, values := range a.header {
		h[name] = values
	}
	h.Set("X-Request-Id", id)
	h.Set("X-Content-Type-Options", "nosniff")
	g.settle(a, r)
	for _, name := range []string{"Etag", "Cache-Control"} {
		if v := a.header.Get(name); v != "" {
			h.Set(name, v)
		}
	}
	bodiless := a.status == http.StatusNoContent || a.status == http.StatusNotModified
	if bodiless {
		h.Del("Content-Type")
	} else {
		h.Set("Content-Length", strconv.Itoa(a.body.Len()))
	}
	w.WriteHeader(a.status)
	if r.Method != http.MethodHead && !bodiless {
		// A caller that has gone away needs no answer.
		_, _ = w.Write(a.body.Bytes())
	}
	attributes := []slog.Attr{
		slog.String("door", "rest"), slog.String("id", id), slog.String("method", r.Method), slog.String("path", clip(r.URL.Path)),
		slog.Int("status", a.status), slog.Duration("took", time.Since(start)), slog.String("peer", r.RemoteAddr),
	}
	if a.reason != "" {
		attributes = append(attributes, slog.String("reason", a.reason))
	}
	g.log.LogAttrs(r.Context(), slog.LevelInfo, "answered", attributes...)
}

// guarded answers a request whatever happens inside.
func (g *Gateway) guarded(a *answer, r *http.Request) {
	var o options
	if r.Method == http.MethodGet || r.Method == http.MethodHead {
		// A cell that picks reads one line whatever goes wrong.
		values, _ := url.ParseQuery(r.URL.RawQuery)
		o = optionsOf(values)
	}
	defer func() {
		if v := recover(); v != nil {
			id := telemetry.ID(r.Context())
			g.log.LogAttrs(r.Context(), slog.LevelError, "panic", slog.String("id", id), slog.Any("value", v), slog.String("stack", string(debug.Stack())))
			a.body.Reset()
			a.status = 0
			g.refuse(a, r, o, statuses.Internal(id), 0)
		}
	}()
	g.serve(a, r, o)
}

func (g *Gateway) serve(a *answer, r *http.Request, o options) {
	const targetTooLong = http.StatusRequestURITooLong
	if len(r.RequestURI) > g.limits.TargetBytes {
		g.refuse(a, r, o, statuses.TooLarge("path and query", len(r.RequestURI), g.limits.TargetBytes), targetTooLong)
		return
	}
	method := r.Method
	if method == http.MethodHead {
		method = http.MethodGet
	}
	found, allowed := find(g.routes, method, r.URL.Path)
	fixed, isPage := g.pages[r.URL.Path]
	if isPage {
		allowed = []string{http.MethodGet, http.MethodHead, http.MethodOptions}
	}
	switch {
	case len(allowed) == 0:
		g.refuse(a, r, o, statuses.New(calandriav1.Reason_REASON_NOT_FOUND, "There is nothing at "+clip(r.URL.Path)+"; GET / lists the paths.", nil), 0)
	case method == http.MethodOptions:
		a.header.Set("Allow", strings.Join(allowed, ", "))
		a.WriteHeader(http.StatusNoContent)
	case isPage && method == http.MethodGet:
		if r.URL.RawQuery != "" {
			g.refuse(a, r, o, statuses.Invalid(&calandriav1.Violation{
				Value: "?" + clip(r.URL.RawQuery), Limit: "no query",
				Detail: "?" + clip(r.URL.RawQuery) + " is not for " + r.URL.Path + ", which takes no query. Leave it out.",
			}), 0)
			return
		}
		if r.URL.Path == "/readyz" && !g.ready() {
			g.refuse(a, r, options{}, statuses.New(calandriav1.Reason_REASON_UNAVAILABLE, "The service is starting or stopping.", nil), 0)
			return
		}
		a.header.Set("Content-Type", fixed.contentType)
		a.fleeting = fixed.fleeting
		a.body.Write(fixed.body)
		a.WriteHeader(http.StatusOK)
	case found == nil:
		a.header.Set("Allow", strings.Join(allowed, ", "))
		g.refuse(a, r, o, statuses.New(calandriav1.Reason_REASON_METHOD_NOT_ALLOWED, clip(r.Method)+" is not for "+r.URL.Path+"; use "+strings.Join(allowed, ", ")+".", nil), 0)
	case method == http.MethodGet:
		g.get(a, r, found, o)
	default:
		g.post(a, r, found)
	}
}

func (g *Gateway) get(a *answer, r *http.Request, found *route, o options) {
	rest, violations := checkQuery(r.URL.RawQuery, found.rpc.Input())
	var steps []step
	if o.pick != "" {
		var violation *calandriav1.Violation
		if steps, violation = checkPick(o.pick, found.rpc.Output()); violation != nil {
			violations = append(violations, violation)
		}
	}
	if len(violations) > 0 {
		g.refuse(a, r, o, statuses.Invalid(violations...), 0)
		return
	}
	g.forward(a, r, o, rest, nil)
	if o.pick == "" || a.status != http.StatusOK || a.reason != "" {
		return
	}
	text, ok := take(a.body.Bytes(), steps)
	a.body.Reset()
	if !ok {
		a.status = 0
		g.refuse(a, r, o, statuses.New(calandriav1.Reason_REASON_NOT_FOUND, clip(o.pick)+" does not exist in this answer.", nil), 0)
		return
	}
	a.header.Set("Content-Type", "text/plain; charset=utf-8")
	a.body.WriteString(text)
}

func (g *Gateway) post(a *answer, r *http.Request, found *route) {
	if problem := mediaProblem(r.Header); problem != "" {
		g.refuse(a, r, options{}, statuses.New(calandriav1.Reason_REASON_UNSUPPORTED_MEDIA_TYPE, problem, nil), 0)
		return
	}
	if r.ContentLength > int64(g.limits.RequestBytes) {
		g.refuse(a, r, options{}, statuses.TooLarge("body", int(min(r.ContentLength, 1<<31-1)), g.limits.RequestBytes), 0)
		return
	}
	body, err := io.ReadAll(io.LimitReader(r.Body, int64(g.limits.RequestBytes)+1))
	if err != nil {
		g.refuse(a, r, options{}, statuses.New(calandriav1.Reason_REASON_CANCELED, "The body did not arrive whole.", nil), http.StatusBadRequest)
		return
	}
	if len(body) > g.limits.RequestBytes {
		g.refuse(a, r, options{}, statuses.TooLarge("body", len(body), g.limits.RequestBytes), 0)
		return
	}
	var violations []*calandriav1.Violation
	if r.URL.RawQuery != "" {
		violations = append(violations, &calandriav1.Violation{
			Value: "?" + clip(r.URL.RawQuery), Limit: "no query",
			Detail: "A POST takes no query; put everything into the body.",
		})
	}
	violations = append(violations, checkBody(body, found.rpc.Input(), g.limits.JSONDepth)...)
	if len(violations) > 0 {
		g.refuse(a, r, options{}, statuses.Invalid(violations...), 0)
		return
	}
	g.forward(a, r, options{}, "", body)
}

type optionsKey struct{}

// forward hands a checked request to the generated handlers.
func (g *Gateway) forward(a *answer, r *http.Request, o options, query string, body []byte) {
	ctx := context.WithValue(r.Context(), optionsKey{}, o)
	clean := r.Clone(ctx)
	if clean.Method == http.MethodHead {
		clean.Method = http.MethodGet
	}
	// Only what is checked goes on: no header of the caller steers the call.
	clean.Header = http.Header{}
	clean.URL.RawQuery = query
	clean.Body = io.NopCloser(bytes.NewReader(body))
	clean.ContentLength = int64(len(body))
	g.mux.ServeHTTP(a, clean)
	if a.status == http.StatusOK && a.reason == "" {
		// protojson varies its white space from build to build.
		var compact bytes.Buffer
		if json.Compact(&compact, a.body.Bytes()) == nil {
			compact.WriteByte('\n')
			a.body = compact
		}
		a.header.Set("Content-Type", "application/json; charset=utf-8")
	}
}

// fail is how the generated handlers report a failure.
func (g *Gateway) fail(ctx context.Context, _ *runtime.ServeMux, _ runtime.Marshaler, w http.ResponseWriter, r *http.Request, err error) {
	o, _ := r.Context().Value(optionsKey{}).(options)
	s, known := statuses.From(err, telemetry.ID(r.Context()))
	if !known {
		g.log.LogAttrs(ctx, slog.LevelError, "fault of the REST face", slog.String("id", telemetry.ID(r.Context())), slog.String("error", err.Error()))
	}
	if a, ok := w.(*answer); ok {
		g.refuse(a, r, o, s, 0)
	}
}

// mediaProblem says what is wrong with how a body is declared, "" if nothing.
// curl declares a form unless told otherwise; that is read as JSON too.
func mediaProblem(h http.Header) string {
	if e := h["Content-Encoding"]; len(e) > 0 && !strings.EqualFold(e[0], "identity") {
		return "Compressed bodies are not read; send plain JSON."
	}
	declared := ""
	if c := h["Content-Type"]; len(c) > 0 {
		declared = c[0]
	}
	if declared == "" {
		return ""
	}
	kind, parameters, err := mime.ParseMediaType(declared)
	if err != nil && !errors.Is(err, mime.ErrInvalidMediaParameter) {
		return "The Content-Type can not be read; send application/json."
	}
	if charset := parameters["charset"]; charset != "" && !strings.EqualFold(charset, "utf-8") && !strings.EqualFold(charset, "us-ascii") {
		return "Text is read as UTF-8 only; send application/json in UTF-8."
	}
	if kind == "application/json" || strings.HasSuffix(kind, "+json") || kind == "application/x-www-form-urlencoded" {
		return ""
	}
	return "A body of type " + clip(kind) + " is not read; send application/json."
}
