package gateway

import (
	"context"
	"encoding/json"
	"io"
	"log/slog"
	"net/http"
	"net/http/httptest"
	"net/url"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/fullstorydev/grpchan/inprocgrpc"
	"google.golang.org/grpc"
	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/rpc"
	"calandria.example/calandria/server/statuses"
	"calandria.example/calandria/server/telemetry"
)

// face is a gateway over the real services, without a socket.
func face(t testing.TB, interceptor grpc.UnaryServerInterceptor) *Gateway {
	t.Helper()
	channel := &inprocgrpc.Channel{}
	if interceptor != nil {
		channel = channel.WithServerUnaryInterceptor(interceptor)
	}
	(&rpc.Services{}).Register(channel)
	g, err := New(channel, Limits{RequestBytes: 1 << 20, JSONDepth: 16, TargetBytes: 8192}, func() bool { return true }, slog.New(slog.DiscardHandler))
	if err != nil {
		t.Fatal(err)
	}
	return g
}

func ask(g http.Handler, method, target, body string) (int, string, http.Header) {
	request := httptest.NewRequest(method, target, strings.NewReader(body))
	recorder := httptest.NewRecorder()
	g.ServeHTTP(recorder, request)
	return recorder.Code, recorder.Body.String(), recorder.Header()
}

func TestPanicLeaksNothing(t *testing.T) {
	var log strings.Builder
	recovering := telemetry.Unary(slog.New(slog.NewTextHandler(&log, nil)))
	g := face(t, func(ctx context.Context, request any, info *grpc.UnaryServerInfo, _ grpc.UnaryHandler) (any, error) {
		return recovering(ctx, request, info, func(context.Context, any) (any, error) { panic("secret of the house") })
	})
	code, body, header := ask(g, "GET", "/v1/engine", "")
	if code != 500 || strings.Contains(body, "secret") || strings.Contains(body, "goroutine") {
		t.Errorf("%d %s", code, body)
	}
	id := header.Get("X-Request-Id")
	if id == "" || !strings.Contains(body, id) || !strings.Contains(log.String(), id) || !strings.Contains(log.String(), "secret of the house") {
		t.Errorf("id %q must lead from the answer %s to the log %s", id, body, log.String())
	}
}

func TestNotReady(t *testing.T) {
	g := face(t, nil)
	g.ready = func() bool { return false }
	if code, body, _ := ask(g, "GET", "/readyz", ""); code != 503 {
		t.Errorf("%d %s", code, body)
	}
	if code, _, _ := ask(g, "GET", "/healthz", ""); code != 200 {
		t.Errorf("%d", code)
	}
}

func TestEveryReasonHasItsWords(t *testing.T) {
	for number := range calandriav1.Reason_name {
		reason := calandriav1.Reason(number)
		if reason == calandriav1.Reason_REASON_UNSPECIFIED {
			continue
		}
		if titles[reason] == "" {
			t.Errorf("%v has no title", reason)
		}
		s := statuses.New(reason, "words", nil)
		if statuses.Reason(s) != reason || statuses.HTTP(reason) < 400 {
			t.Errorf("%v does not survive as a status: %v", reason, s)
		}
	}
}

// wholeFace is a gateway over the real services behind the real interceptors.
func wholeFace(t testing.TB) *Gateway {
	t.Helper()
	chain, err := rpc.Chain(slog.New(slog.DiscardHandler), time.Minute, 1<<20)
	if err != nil {
		t.Fatal(err)
	}
	return face(t, func(ctx context.Context, request any, info *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
		for _, interceptor := range slices.Backward(chain) {
			inner := handler
			handler = func(ctx context.Context, request any) (any, error) { return interceptor(ctx, request, info, inner) }
		}
		return handler(ctx, request)
	})
}

// TestRequestsHoldOnlyWhatTheCheckerReads fails when a proto gains a kind of
// field that the body checker does not know yet.
func TestRequestsHoldOnlyWhatTheCheckerReads(t *testing.T) {
	seen := map[protoreflect.FullName]bool{}
	var look func(d protoreflect.MessageDescriptor)
	look = func(d protoreflect.MessageDescriptor) {
		if seen[d.FullName()] {
			return
		}
		seen[d.FullName()] = true
		for i := range d.Fields().Len() {
			f := d.Fields().Get(i)
			switch f.Kind() {
			case protoreflect.DoubleKind, protoreflect.StringKind:
			case protoreflect.MessageKind:
				look(f.Message())
			default:
				t.Errorf("%s is of kind %v, which checkBody and checkQuery do not read", f.FullName(), f.Kind())
			}
		}
	}
	for _, r := range routesOf() {
		look(r.rpc.Input())
	}
}

// checkAnswered holds any answer to what every answer must be.
func checkAnswered(t *testing.T, code int, body string, header http.Header) {
	t.Helper()
	if code >= 500 {
		t.Fatalf("%d %s", code, body)
	}
	if strings.Contains(body, "NaN") && code == 200 {
		t.Fatalf("NaN in an answer: %s", body)
	}
	if header.Get("Content-Type") == "application/problem+json" {
		var problem Problem
		if err := json.Unmarshal([]byte(body), &problem); err != nil || problem.Reason == "" || problem.Detail == "" || problem.Status != code {
			t.Fatalf("not a problem: %v %s", err, body)
		}
	} else if code != 200 {
		t.Fatalf("%d without a problem: %s", code, body)
	}
}

// FuzzBody sends any text as a body. It must be answered or refused, never
// fail; and whatever the checker lets through the JSON reader must take.
func FuzzBody(f *testing.F) {
	for _, seed := range []string{
		`{}`, `{"custom_liquor":{"rise_k":0,"specific_heat_kj_per_kg_k":4},"feed":{"flow_kg_per_h":1000,"solids_fraction":0.1,"temperature_c":50},"product":{"solids_fraction":0.4},"steam":{"pressure_kpa_abs":200},"effect":{"pressure_kpa_abs":20,"coefficient_w_per_m2_k":2000}}`,
		`{"custom_liquor":{"duhring":{"lines":[{"solids_fraction":0.5,"slope":1.1,"intercept_c":30}]},"enthalpy_table":{"rows":[{"solids_fraction":0.1,"points":[{"temperature_c":20,"enthalpy_kj_per_kg":80}]}]}},"find":["effect.vent_fraction"],"economy":1e0,"sensitivities_of":["effect.area_m2"],"require_engine_version":"0"}`,
		`{"economy":NaN}`, `{"economy":1,5}`, `[[[[`, `{"a":{"b":`, "\"\xff\"", `{"feed":null}`, `{"economy":"1,5"} {}`, `{"custom_liquor":{"source":"\ud800","rise_k":0,"specific_heat_kj_per_kg_k":4}}`,
		`{"pressure_kpa_abs":[100,-1,2e4],"enthalpy_kj_per_kg":[1e3,2,3],"want":["region","viscosity_pa_s"]}`, `{"enthalpy_kj_per_kg":[2087.5],"entropy_kj_per_kg_k":[4.412]}`,
	} {
		f.Add(seed)
	}
	g := wholeFace(f)
	f.Fuzz(func(t *testing.T, body string) {
		for _, request := range []proto.Message{&calandriav1.SolveEffectRequest{}, &calandriav1.ComputeSteamStatesRequest{}} {
			if len(checkBody([]byte(body), request.ProtoReflect().Descriptor(), 16)) == 0 {
				if err := (protojson.UnmarshalOptions{}).Unmarshal([]byte(body), request); err != nil {
					t.Fatalf("let through, but %v: %q", err, body)
				}
			}
		}
		for _, path := range []string{"/v1/effects:solve", "/v1/effects:check", "/v1/steam/states:compute"} {
			code, text, header := ask(g, "POST", path, body)
			checkAnswered(t, code, text, header)
		}
	})
}

// FuzzQuery does the same for a query.
func FuzzQuery(f *testing.F) {
	for _, seed := range []string{
		"pressure_kpa_abs=100", "temperature_c=100&pick=latent_heat_kj_per_kg&errors=inline", "pressure_kpa_abs=1,5", "pick=liquid.phase&temperature_c=0",
		"a=%zz", "temperature_c=1;2", "dryness_fraction=0.5&pressure_kpa_abs=5", "pick=advisories[0].code&temperature_c=5", "temperature_c=+5", "temperature_c=.5e1", "custom_liquor.source=%ff&custom_liquor.rise_k=0&custom_liquor.specific_heat_kj_per_kg_k=4&feed.flow_kg_per_h=1000&feed.solids_fraction=0.1&feed.temperature_c=50&product.solids_fraction=0.4&steam.pressure_kpa_abs=200&effect.pressure_kpa_abs=20&effect.coefficient_w_per_m2_k=2000",
	} {
		f.Add(seed)
	}
	g := wholeFace(f)
	f.Fuzz(func(t *testing.T, query string) {
		for _, path := range []string{"/v1/steam/saturation", "/v1/steam/state", "/v1/effects:solve"} {
			target := &url.URL{Path: path, RawQuery: query}
			request, err := http.NewRequestWithContext(t.Context(), http.MethodGet, "http://x/", http.NoBody)
			if err != nil {
				t.Fatal(err)
			}
			request.URL, request.RequestURI = target, target.String()
			recorder := httptest.NewRecorder()
			g.ServeHTTP(recorder, request)
			text, err := io.ReadAll(recorder.Body)
			if err != nil {
				t.Fatal(err)
			}
			if kind := recorder.Header().Get("Content-Type"); strings.HasPrefix(kind, "text/plain") {
				if recorder.Code >= 500 || strings.Contains(string(text), "\n") {
					t.Fatalf("%d %q", recorder.Code, text)
				}
				continue
			}
			checkAnswered(t, recorder.Code, string(text), recorder.Header())
		}
	})
}

func TestNumbersThatAreRead(t *testing.T) {
	g := face(t, nil)
	for _, text := range []string{"60", "60.0", "6e1", "+60", "%2B60", "060"} {
		code, body, _ := ask(g, "GET", "/v1/steam/saturation?temperature_c="+text+"&pick=temperature_c", "")
		if want := text != "+60"; (code == 200) != want {
			t.Errorf("%s: %d %s", text, code, body)
		}
	}
}

const rest = `"feed":{"flow_kg_per_h":1000,"solids_fraction":0.1,"temperature_c":50},"product":{"solids_fraction":0.4},"steam":{"pressure_kpa_abs":200},"effect":{"pressure_kpa_abs":20,"coefficient_w_per_m2_k":2000}`

// TestViolationsStandAtTheirFields asks for exactly the violations that there
// are: each at its own field, none twice, none that only follows from another.
func TestViolationsStandAtTheirFields(t *testing.T) {
	g := face(t, nil)
	liquor := func(text string) string { return `{"custom_liquor":{` + text + `},` + rest + `}` }
	const heat = `,"specific_heat_kj_per_kg_k":4`
	for _, c := range []struct {
		name, body string
		fields     []string
	}{
		{"half a surrogate pair", liquor(`"source":"\ud800","rise_k":0` + heat), []string{"custom_liquor.source"}},
		{"second half first", liquor(`"source":"\udc00\ud800","rise_k":0` + heat), []string{"custom_liquor.source"}},
		{"bad member of a choice", liquor(`"rise_k":"x"` + heat), []string{"custom_liquor.rise_k"}},
		{"bad item before a bad number", liquor(`"rise_polynomial":{"coefficients_k":["x",1e9]}` + heat),
			[]string{"custom_liquor.rise_polynomial.coefficients_k[0]", "custom_liquor.rise_polynomial.coefficients_k[1]"}},
		{"only bad items", liquor(`"rise_polynomial":{"coefficients_k":[null]}` + heat), []string{"custom_liquor.rise_polynomial.coefficients_k[0]"}},
		{"bad group before a bad group", liquor(`"duhring":{"lines":[5,{"solids_fraction":2,"slope":1,"intercept_c":0}]}` + heat),
			[]string{"custom_liquor.duhring.lines[0]", "custom_liquor.duhring.lines[1].solids_fraction"}},
		{"twice, and bad inside", `{"custom_liquor":{"rise_k":0` + heat + `},"feed":{},` + strings.Replace(rest, `:0.1`, `:18`, 1) + `}`,
			[]string{"feed", "feed.solids_fraction"}},
		{"byte-order mark", "\ufeff{}", []string{""}},
	} {
		code, body, header := ask(g, "POST", "/v1/effects:solve", c.body)
		checkAnswered(t, code, body, header)
		var problem Problem
		if err := json.Unmarshal([]byte(body), &problem); err != nil {
			t.Fatal(err)
		}
		var fields []string
		for _, e := range problem.Errors {
			fields = append(fields, e.Field)
		}
		if code != 400 || !slices.Equal(fields, c.fields) {
			t.Errorf("%s: %d at %q, want %q: %s", c.name, code, fields, c.fields, body)
		}
	}
	// What only looks like half a pair.
	for _, source := range []string{`\ud83d\udca7`, `\\ud800`, `\u00e9\\`, "\U0001F4A7", `\ufffd`} {
		if code, body, _ := ask(g, "POST", "/v1/effects:solve", liquor(`"source":"`+source+`","rise_k":0`+heat)); code != 200 {
			t.Errorf("%s: %d %s", source, code, body)
		}
	}
}

// TestManyUnknownNames sends thousands of them; the answer lists no more than
// a person can read.
func TestManyUnknownNames(t *testing.T) {
	names := strings.Repeat(`"specific_heat_of_something":1,`, 30_000)
	code, body, header := ask(face(t, nil), "POST", "/v1/effects:solve", `{`+names+`"a":1}`)
	checkAnswered(t, code, body, header)
	if n := strings.Count(body, `"field":`); n != violationsMax {
		t.Errorf("%d violations", n)
	}
}

// TestTextsInQueries holds texts that are not UTF-8 back from the call.
func TestTextsInQueries(t *testing.T) {
	const path = "/v1/effects:solve?custom_liquor.rise_k=0&custom_liquor.specific_heat_kj_per_kg_k=4&feed.flow_kg_per_h=1000&feed.solids_fraction=0.1&feed.temperature_c=50&product.solids_fraction=0.4&steam.pressure_kpa_abs=200&effect.pressure_kpa_abs=20&effect.coefficient_w_per_m2_k=2000"
	g := face(t, nil)
	for query, want := range map[string]int{"&custom_liquor.source=caf%C3%A9": 200, "&custom_liquor.source=caf%E9": 400, "&find=%ff": 400} {
		if code, body, _ := ask(g, "GET", path+query, ""); code != want {
			t.Errorf("%s: %d %s", query, code, body)
		}
	}
}

// TestGivenUp ends calls from outside while they are worked on.
func TestGivenUp(t *testing.T) {
	var log strings.Builder
	ctx, cancel := context.WithCancel(t.Context())
	g := face(t, func(inner context.Context, _ any, _ *grpc.UnaryServerInfo, _ grpc.UnaryHandler) (any, error) {
		cancel()
		<-inner.Done()
		return nil, inner.Err()
	})
	g.log = slog.New(slog.NewTextHandler(&log, nil))
	recorder := httptest.NewRecorder()
	g.ServeHTTP(recorder, httptest.NewRequest("GET", "/v1/engine", nil).WithContext(ctx))
	if recorder.Code != 499 || strings.Contains(log.String(), "level=ERROR") {
		t.Errorf("%d %s, log %s", recorder.Code, recorder.Body, log.String())
	}
}

// TestPickIsAnsweredOnOneLine holds every refusal of a call that picks to one
// line that a spreadsheet cell can show, whatever refused it.
func TestPickIsAnsweredOnOneLine(t *testing.T) {
	recovering := telemetry.Unary(slog.New(slog.DiscardHandler))
	g := face(t, func(ctx context.Context, request any, info *grpc.UnaryServerInfo, _ grpc.UnaryHandler) (any, error) {
		return recovering(ctx, request, info, func(context.Context, any) (any, error) { panic("secret of the house") })
	})
	for _, c := range []struct {
		target string
		status int
	}{
		{"/v1/steam/saturated?pick=temperature_c", 404},
		{"/openapi.json?pick=info", 400},
		{"/v1/steam/saturation?temperature_c=5&pick=temperature_c&pick=region", 400},
		{"/v1/steam/saturation?temperature_c=5&pick=temperature_c&x=%zz", 400},
		{"/v1/steam/saturation?pick=temperature_c&x=" + strings.Repeat("y", 9000), 414},
		{"/v1/steam/saturation?temperature_c=5&pick=temperature_c", 500},
	} {
		for _, inline := range []string{"", "&errors=inline"} {
			want := c.status
			if inline != "" {
				want = 200
			}
			code, body, header := ask(g, "GET", c.target+inline, "")
			if code != want || !strings.HasPrefix(body, "ERROR ") || strings.ContainsAny(body, "\n{") || strings.Contains(body, "secret") ||
				header.Get("Content-Type") != "text/plain; charset=utf-8" || header.Get("Cache-Control") != "no-store" {
				t.Errorf("%.60s%s: %d %q %v, want %d", c.target, inline, code, body, header, want)
			}
		}
	}
}

// TestTagsOnSeveralLines gives If-None-Match twice, as HTTP allows.
func TestTagsOnSeveralLines(t *testing.T) {
	g := face(t, nil)
	_, _, header := ask(g, "GET", "/v1/engine", "")
	request := httptest.NewRequest(http.MethodGet, "/v1/engine", http.NoBody)
	request.Header.Add("If-None-Match", `"other"`)
	request.Header.Add("If-None-Match", header.Get("Etag"))
	recorder := httptest.NewRecorder()
	g.ServeHTTP(recorder, request)
	if recorder.Code != http.StatusNotModified || recorder.Body.Len() != 0 {
		t.Errorf("%d %q", recorder.Code, recorder.Body)
	}
}
