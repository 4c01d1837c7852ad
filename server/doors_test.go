package main

import (
	"context"
	"encoding/json"
	"errors"
	"io"
	"log/slog"
	"math"
	"math/rand/v2"
	"net/http"
	"net/url"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/credentials/insecure"
	healthpb "google.golang.org/grpc/health/grpc_health_v1"
	"google.golang.org/grpc/metadata"
	"google.golang.org/grpc/reflection/grpc_reflection_v1"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/encoding/protowire"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"

	"calandria.example/calandria/engine/vetting"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/settings"
	"calandria.example/calandria/server/statuses"
)

// service is a real server on real sockets.
type service struct {
	doors
	connection *grpc.ClientConn
}

func start(t *testing.T) *service {
	t.Helper()
	s, err := settings.Read([]string{"-grpc-listen", "127.0.0.1:0", "-http-listen", "127.0.0.1:0"}, func(string) string { return "" }, io.Discard)
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	up, ended := make(chan doors, 1), make(chan error, 1)
	go func() {
		ended <- serve(ctx, s, slog.New(slog.DiscardHandler), vetting.Run(), func(d doors) { up <- d })
	}()
	var d doors
	select {
	case d = <-up:
	case err := <-ended:
		t.Fatal(err)
	}
	connection, err := grpc.NewClient(d.grpcAddress, grpc.WithTransportCredentials(insecure.NewCredentials()))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := connection.Close(); err != nil {
			t.Error(err)
		}
		http.DefaultClient.CloseIdleConnections()
		cancel()
		if err := <-ended; err != nil {
			t.Error(err)
		}
	})
	return &service{doors: d, connection: connection}
}

// ask makes one HTTP request and returns its answer whole.
func (s *service) ask(t *testing.T, method, path, body string, header ...string) (*http.Response, string) {
	t.Helper()
	request, err := http.NewRequestWithContext(t.Context(), method, s.httpURL+path, strings.NewReader(body))
	if err != nil {
		t.Fatal(err)
	}
	for i := 0; i < len(header); i += 2 {
		request.Header.Set(header[i], header[i+1])
	}
	response, err := http.DefaultClient.Do(request)
	if err != nil {
		t.Fatal(err)
	}
	defer response.Body.Close()
	text, err := io.ReadAll(response.Body)
	if err != nil {
		t.Fatal(err)
	}
	return response, string(text)
}

// TestWorkedExamplesThroughEveryDoor sends the worked examples of textbooks
// (testdata/published/effects.json, sources and tolerances beside them)
// through gRPC, through REST by POST, and by GET where nothing is repeated.
func TestWorkedExamplesThroughEveryDoor(t *testing.T) {
	s := start(t)
	text, err := os.ReadFile("../testdata/published/effects.json")
	if err != nil {
		t.Fatal(err)
	}
	var file struct {
		Examples []struct {
			ID, Source string
			Request    json.RawMessage
			Expected   []struct {
				Field     string
				Value     float64
				Tolerance float64 `json:"tolerance_percent"`
			}
		}
	}
	if err := json.Unmarshal(text, &file); err != nil {
		t.Fatal(err)
	}
	if len(file.Examples) != 12 {
		t.Errorf("%d examples, want 12", len(file.Examples))
	}
	byGet := 0
	for _, e := range file.Examples {
		var request calandriav1.SolveEffectRequest
		if err := protojson.Unmarshal(e.Request, &request); err != nil {
			t.Fatal(err)
		}
		overGRPC, err := calandriav1.NewTrainServiceClient(s.connection).SolveEffect(t.Context(), &request)
		if err != nil {
			t.Fatalf("%s: %v", e.ID, err)
		}
		for _, x := range e.Expected {
			got := numberAt(t, overGRPC.ProtoReflect(), x.Field)
			deviation := 100 * (got/x.Value - 1)
			t.Logf("%s, %s: %s is %.6g, published %.6g: %+.3f %%, allowed %g %%", e.ID, e.Source, x.Field, got, x.Value, deviation, x.Tolerance)
			if !(math.Abs(deviation) <= x.Tolerance) {
				t.Errorf("%s %s is %.6g, published %.6g: %+.3f %%, allowed %g %%", e.ID, x.Field, got, x.Value, deviation, x.Tolerance)
			}
		}
		check := func(door string, status int, body string) {
			t.Helper()
			var solution calandriav1.EffectSolution
			if err := protojson.Unmarshal([]byte(body), &solution); err != nil || status != http.StatusOK {
				t.Errorf("%s %s: status %d, %v: %s", e.ID, door, status, err, body)
			} else if !proto.Equal(&solution, overGRPC) {
				t.Errorf("%s %s differs from gRPC:\n%s", e.ID, door, body)
			}
		}
		response, body := s.ask(t, http.MethodPost, "/v1/effects:solve", string(e.Request), "Content-Type", "application/json")
		check("POST", response.StatusCode, body)
		query := url.Values{}
		if flatten(request.ProtoReflect(), "", query) {
			response, body := s.ask(t, http.MethodGet, "/v1/effects:solve?"+query.Encode(), "")
			check("GET", response.StatusCode, body)
			byGet++
		}
	}
	if byGet < 6 {
		t.Errorf("%d examples went through GET, want those without a table", byGet)
	}
}

// flatten writes a request as query parameters; false if it holds a table.
func flatten(m protoreflect.Message, prefix string, query url.Values) (ok bool) {
	ok = true
	m.Range(func(f protoreflect.FieldDescriptor, v protoreflect.Value) bool {
		name := prefix + string(f.Name())
		switch {
		case f.IsList() && f.Kind() == protoreflect.MessageKind:
			ok = false
		case f.IsList():
			for i := range v.List().Len() {
				query.Add(name, v.List().Get(i).String())
			}
		case f.Kind() == protoreflect.MessageKind:
			ok = flatten(v.Message(), name+".", query) && ok
		case f.Kind() == protoreflect.DoubleKind:
			query.Set(name, strconv.FormatFloat(v.Float(), 'g', -1, 64))
		default:
			query.Set(name, v.String())
		}
		return ok
	})
	return ok
}

func numberAt(t *testing.T, m protoreflect.Message, path string) float64 {
	t.Helper()
	names := strings.Split(path, ".")
	for _, name := range names[:len(names)-1] {
		m = m.Get(m.Descriptor().Fields().ByName(protoreflect.Name(name))).Message()
	}
	return m.Get(m.Descriptor().Fields().ByName(protoreflect.Name(names[len(names)-1]))).Float()
}

// TestPairsOfThePublishedStates asks for the states that the release prints by
// each pair of their printed coordinates, over gRPC, and expects the others:
// the rounding of nine printed figures, carried to what is asked, is the
// tolerance.
func TestPairsOfThePublishedStates(t *testing.T) {
	s := start(t)
	client := calandriav1.NewSteamServiceClient(s.connection)
	for _, c := range []struct {
		source                         string
		region                         int32
		kelvin, kilopascals, h, s, v   float64
		relativeV, kelvins, relativeHS float64
	}{
		{"IAPWS R7-97(2012) Table 5", 1, 500, 3000, 975.542239, 2.58041912, 0.1202418e-2, 1e-7, 1e-5, 1e-6},
		{"IAPWS R7-97(2012) Table 15", 2, 700, 30000, 2631.49474, 5.17540298, 0.542946619e-2, 1e-7, 1e-5, 1e-7},
		{"IAPWS R7-97(2012) Table 33", 3, 650, 25583.7018, 1863.43019, 4.05427273, 1. / 500, 1e-7, 1e-5, 1e-7},
		{"IAPWS R7-97(2012) Table 33", 3, 650, 22293.0643, 2375.12401, 4.85438792, 1. / 200, 1e-7, 1e-5, 1e-7},
		{"IAPWS R7-97(2012) Table 42", 5, 1500, 500, 5219.76855, 9.65408875, 0.13845509e1, 1e-7, 1e-5, 1e-7},
	} {
		p, h, entropy := proto.Float64(c.kilopascals), proto.Float64(c.h), proto.Float64(c.s)
		for name, request := range map[string]*calandriav1.GetSteamStateRequest{
			"p and T": {PressureKpaAbs: p, TemperatureC: proto.Float64(c.kelvin - 273.15)},
			"p and h": {PressureKpaAbs: p, EnthalpyKjPerKg: h},
			"p and s": {PressureKpaAbs: p, EntropyKjPerKgK: entropy},
			"h and s": {EnthalpyKjPerKg: h, EntropyKjPerKgK: entropy},
		} {
			state, err := client.GetSteamState(t.Context(), request)
			if err != nil {
				t.Errorf("%s, region %d, %s: %v", c.source, c.region, name, err)
				continue
			}
			// A liquid's pressure follows from the rest of h - T s, whose last
			// printed figure is worth 60 kPa; nothing else depends on it so much.
			pressure := 1e-6
			if name == "h and s" {
				pressure = 1e-3
			}
			if state.GetRegion() != c.region ||
				!(math.Abs(state.GetTemperatureC()+273.15-c.kelvin) <= c.kelvins) ||
				!(math.Abs(state.GetPressureKpaAbs()/c.kilopascals-1) <= pressure) ||
				!(math.Abs(state.GetSpecificVolumeM3PerKg()/c.v-1) <= c.relativeV) ||
				!(math.Abs(state.GetEnthalpyKjPerKg()/c.h-1) <= c.relativeHS) ||
				!(math.Abs(state.GetEntropyKjPerKgK()/c.s-1) <= c.relativeHS) {
				t.Errorf("%s, region %d, %s: %v", c.source, c.region, name, state)
			}
		}
	}
}

// TestStatesAreSingleStates: what columns hold is what single calls answer, to
// the last bit, and what they refuse is refused in the same words.
func TestStatesAreSingleStates(t *testing.T) {
	s := start(t)
	client := calandriav1.NewSteamServiceClient(s.connection)
	random := rand.New(rand.NewPCG(3, 5))
	draw := func(low, high float64, n int) []float64 {
		values := make([]float64, n)
		for i := range values {
			values[i] = low + (high-low)*random.Float64()
		}
		return values
	}
	const states = 300
	for name, request := range map[string]*calandriav1.ComputeSteamStatesRequest{
		"p and T":        {PressureKpaAbs: draw(-1000, 110_000, states), TemperatureC: draw(-20, 1200, states)},
		"p and h":        {PressureKpaAbs: draw(1, 30_000, states), EnthalpyKjPerKg: draw(-100, 5000, states)},
		"p and s":        {PressureKpaAbs: draw(1, 30_000, states), EntropyKjPerKgK: draw(-1, 12, states)},
		"h and s":        {EnthalpyKjPerKg: draw(-100, 5000, states), EntropyKjPerKgK: draw(-1, 12, states)},
		"p and dryness":  {PressureKpaAbs: draw(1, 25_000, states), DrynessFraction: draw(-0.1, 1.1, states)},
		"T and dryness":  {TemperatureC: draw(-10, 400, states), DrynessFraction: draw(-0.1, 1.1, states)},
		"in the jumps":   {PressureKpaAbs: []float64{20_000, 60_000, 60_000, 49_000}, EnthalpyKjPerKg: []float64{1645.953, 1567.405, 2658.49, 3930.65}},
		"no number":      {PressureKpaAbs: []float64{math.NaN(), 100, math.Inf(1)}, TemperatureC: []float64{100, math.Inf(-1), 100}},
		"where both are": {PressureKpaAbs: []float64{22_064}, TemperatureC: []float64{373.946}},
	} {
		answer, err := client.ComputeSteamStates(t.Context(), request)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		rows, failures := map[int32]int{}, map[int32]*calandriav1.StateFailure{}
		for row, index := range answer.GetIndex() {
			rows[index] = row
		}
		for _, f := range answer.GetFailures() {
			failures[f.GetIndex()] = f
		}
		at := func(column []float64, i int) *float64 {
			if len(column) == 0 {
				return nil
			}
			return &column[i]
		}
		count := max(len(request.GetPressureKpaAbs()), len(request.GetTemperatureC()), len(request.GetEnthalpyKjPerKg()))
		remarks := 0
		for _, group := range answer.GetAdvisories() {
			remarks += len(group.GetIndex())
		}
		if name == "in the jumps" && remarks != count {
			t.Errorf("%s: %d remarks", name, remarks)
		}
		if len(rows)+len(failures) != count {
			t.Errorf("%s: %d answers and %d failures of %d", name, len(rows), len(failures), count)
		}
		for i := range count {
			single, err := client.GetSteamState(t.Context(), &calandriav1.GetSteamStateRequest{
				PressureKpaAbs: at(request.GetPressureKpaAbs(), i), TemperatureC: at(request.GetTemperatureC(), i), DrynessFraction: at(request.GetDrynessFraction(), i),
				EnthalpyKjPerKg: at(request.GetEnthalpyKjPerKg(), i), EntropyKjPerKgK: at(request.GetEntropyKjPerKgK(), i),
			})
			if err != nil {
				refusal, failure := status.Convert(err), failures[int32(i)]
				same := slices.EqualFunc(failure.GetViolations(), statuses.Violations(refusal), func(a, b *calandriav1.Violation) bool { return proto.Equal(a, b) })
				if failure.GetMessage() != refusal.Message() || failure.GetReason() != statuses.Reason(refusal) || !same {
					t.Errorf("%s, %d: %v, alone %v", name, i, failure, refusal)
				}
				continue
			}
			row, ok := rows[int32(i)]
			if !ok {
				t.Errorf("%s, %d: %v, alone %v", name, i, failures[int32(i)], single)
				continue
			}
			if joined := rowOf(answer, row, int32(i)); !proto.Equal(joined, single) {
				t.Errorf("%s, %d: %v, alone %v", name, i, joined, single)
			}
		}
	}
}

// TestManyFailuresReachTheCaller sends as many states as a request may hold,
// none of which exists, or all of which have every number, to a gRPC client
// that takes 4 MiB, as clients do unless told otherwise.
func TestManyFailuresReachTheCaller(t *testing.T) {
	s := start(t)
	client := calandriav1.NewSteamServiceClient(s.connection)
	const states = 20_000
	repeat := func(v float64) []float64 { return slices.Repeat([]float64{v}, states) }
	boiling, err := client.GetSaturation(t.Context(), &calandriav1.GetSaturationRequest{TemperatureC: proto.Float64(100)})
	if err != nil {
		t.Fatal(err)
	}
	for name, c := range map[string]struct {
		request *calandriav1.ComputeSteamStatesRequest
		reason  calandriav1.Reason
	}{
		"both beyond their bounds": {&calandriav1.ComputeSteamStatesRequest{PressureKpaAbs: repeat(-1.2345678901234567e-200), EnthalpyKjPerKg: repeat(-1.2345678901234567e200)}, calandriav1.Reason_REASON_FIELD_INVALID},
		"on the saturation line":   {&calandriav1.ComputeSteamStatesRequest{PressureKpaAbs: repeat(boiling.GetPressureKpaAbs()), TemperatureC: repeat(100)}, calandriav1.Reason_REASON_FIELD_INVALID},
		"beyond the range":         {&calandriav1.ComputeSteamStatesRequest{PressureKpaAbs: repeat(60_000), TemperatureC: repeat(900)}, calandriav1.Reason_REASON_OUTSIDE_CORRELATION},
		"good":                     {&calandriav1.ComputeSteamStatesRequest{TemperatureC: repeat(100), DrynessFraction: repeat(1)}, calandriav1.Reason_REASON_UNSPECIFIED},
	} {
		answer, err := client.ComputeSteamStates(t.Context(), c.request)
		failures := answer.GetFailures()
		if c.reason == calandriav1.Reason_REASON_UNSPECIFIED {
			if err != nil || len(answer.GetIndex()) != states || len(failures) != 0 {
				t.Errorf("%s: %d answers, %d failures, %v", name, len(answer.GetIndex()), len(failures), err)
			}
			continue
		}
		if err != nil || len(failures) != states {
			t.Errorf("%s: %d failures, %v", name, len(failures), err)
			continue
		}
		for i, f := range failures {
			if f.GetReason() != c.reason || f.GetIndex() != int32(i) || f.GetMessage() == "" || (len(f.GetViolations()) > 0) != (i < 2000) {
				t.Errorf("%s, %d: %v", name, i, f)
				break
			}
		}
	}
}

// rowOf makes one state of the columns of many, by the fields' names.
func rowOf(answer *calandriav1.SteamStates, row int, index int32) *calandriav1.SteamState {
	state := &calandriav1.SteamState{Provenance: answer.GetProvenance()}
	from, to := answer.ProtoReflect(), state.ProtoReflect()
	for i := range to.Descriptor().Fields().Len() {
		field := to.Descriptor().Fields().Get(i)
		column := from.Descriptor().Fields().ByName(field.Name())
		switch {
		case column == nil || field.IsList() || field.Name() == "provenance":
		case column.IsList():
			to.Set(field, from.Get(column).List().Get(row))
		default:
			sparse, ok := from.Get(column).Message().Interface().(*calandriav1.SparseColumn)
			if at := slices.Index(sparse.GetIndex(), index); ok && at >= 0 {
				to.Set(field, protoreflect.ValueOfFloat64(sparse.GetValue()[at]))
			}
		}
	}
	for _, group := range answer.GetAdvisories() {
		if slices.Contains(group.GetIndex(), index) {
			state.Advisories = append(state.Advisories, group.GetAdvisory())
		}
	}
	// A single state names the models of what it holds only.
	var models []*calandriav1.Model
	for _, m := range state.GetProvenance().GetModels() {
		if m.GetId() == "iapws-r7-97" || m.GetId() == "iapws-r12-08" && state.ViscosityPaS != nil ||
			m.GetId() == "iapws-r15-11" && state.ConductivityWPerMK != nil || m.GetId() == "iapws-r1-76" && state.SurfaceTensionNPerM != nil {
			models = append(models, m)
		}
	}
	state.Provenance = &calandriav1.Provenance{EngineVersion: answer.GetProvenance().GetEngineVersion(), Models: models}
	return state
}

// TestCheckTellsWhatTheSolveWould: a question's check names the same conflict,
// the same gap and the same defaults as its solve, at both doors.
func TestCheckTellsWhatTheSolveWould(t *testing.T) {
	s := start(t)
	client := calandriav1.NewTrainServiceClient(s.connection)
	for _, c := range []struct{ name, body string }{
		{"a question", `{` + good + `}`},
		{"too many", `{` + good + `,"evaporation_kg_per_h":750}`},
		{"too few", `{"custom_liquor":{"rise_k":0,"specific_heat_kj_per_kg_k":4},"feed":{"flow_kg_per_h":1000},"steam":{"pressure_kpa_abs":200}}`},
	} {
		request := &calandriav1.SolveEffectRequest{}
		if err := protojson.Unmarshal([]byte(c.body), request); err != nil {
			t.Fatal(err)
		}
		check, err := client.CheckEffect(t.Context(), request)
		if err != nil {
			t.Fatalf("%s: %v", c.name, err)
		}
		_, body := s.ask(t, http.MethodPost, "/v1/effects:check", c.body)
		var overREST calandriav1.EffectCheck
		if err := protojson.Unmarshal([]byte(body), &overREST); err != nil || !proto.Equal(&overREST, check) {
			t.Errorf("%s: REST differs from gRPC: %v %s", c.name, err, body)
		}
		solution, err := client.SolveEffect(t.Context(), request)
		if check.GetDetermined() != (err == nil) {
			t.Errorf("%s: %v, solving %v", c.name, check, err)
		}
		if err != nil {
			named := append(check.GetConflict(), check.GetClosers()...)
			for i, v := range statuses.Violations(status.Convert(err)) {
				if i >= len(named) || v.GetField() != named[i] {
					t.Errorf("%s: %v, solving %v", c.name, check, err)
				}
			}
			continue
		}
		if len(check.GetUnknowns()) == 0 || !slices.Contains(check.GetUnknowns(), "effect.area_m2") || len(check.GetDefaultsApplied()) != len(solution.GetDefaultsApplied()) {
			t.Errorf("%s: %v, solving %v", c.name, check, solution.GetDefaultsApplied())
		}
	}
}

// TestSensitivitiesInUnits: a sensitivity is in the units of its two fields. By
// the solids balance a plant's product is proportional to its feed, and by the
// rate equation its area is inverse to its coefficient.
func TestSensitivitiesInUnits(t *testing.T) {
	s := start(t)
	_, body := s.ask(t, http.MethodPost, "/v1/effects:solve", `{`+good+`,"sensitivities_of":["product.flow_kg_per_h","effect.area_m2"]}`)
	var solution calandriav1.EffectSolution
	if err := protojson.Unmarshal([]byte(body), &solution); err != nil {
		t.Fatalf("%v: %s", err, body)
	}
	found := 0
	for _, m := range solution.GetSensitivities() {
		switch m.GetOf() + " " + m.GetBy() {
		case "product.flow_kg_per_h feed.flow_kg_per_h":
			found++
			if math.Abs(m.GetValue()-0.25) > 1e-9 || math.Abs(m.GetRelative()-1) > 1e-9 {
				t.Errorf("%v", m)
			}
		case "effect.area_m2 effect.coefficient_w_per_m2_k":
			found++
			if math.Abs(m.GetRelative()+1) > 1e-9 || math.Abs(m.GetValue()/(-solution.GetEffect().GetAreaM2()/2000)-1) > 1e-9 {
				t.Errorf("%v", m)
			}
		case "effect.area_m2 feed.temperature_c":
			found++
			if m.Relative != nil || !(m.GetValue() < 0) {
				t.Errorf("%v", m)
			}
		}
	}
	if found != 3 {
		t.Errorf("%d of 3: %s", found, body)
	}
}

// TestWantedColumns: a request may ask for some columns only, and gets the same
// numbers; over REST the answer is the same as over gRPC.
func TestWantedColumns(t *testing.T) {
	s := start(t)
	client := calandriav1.NewSteamServiceClient(s.connection)
	request := &calandriav1.ComputeSteamStatesRequest{
		PressureKpaAbs: []float64{100, 20, -5}, EnthalpyKjPerKg: []float64{2800, 1000, 1}, Want: []string{"temperature_c", "dryness_fraction"},
	}
	some, err := client.ComputeSteamStates(t.Context(), request)
	if err != nil {
		t.Fatal(err)
	}
	request.Want = nil
	all, err := client.ComputeSteamStates(t.Context(), request)
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(some.GetTemperatureC(), all.GetTemperatureC()) || !proto.Equal(some.GetDrynessFraction(), all.GetDrynessFraction()) ||
		some.PressureKpaAbs != nil || some.ViscosityPaS != nil || len(some.GetProvenance().GetModels()) != 1 || len(all.GetProvenance().GetModels()) != 4 {
		t.Errorf("%v, all %v", some, all)
	}
	text, err := protojson.MarshalOptions{UseProtoNames: true}.Marshal(request)
	if err != nil {
		t.Fatal(err)
	}
	_, body := s.ask(t, http.MethodPost, "/v1/steam/states:compute", string(text))
	var overREST calandriav1.SteamStates
	if err := protojson.Unmarshal([]byte(body), &overREST); err != nil || !proto.Equal(&overREST, all) {
		t.Errorf("REST differs from gRPC: %v %s", err, body)
	}
}

// TestSteamOverBothDoors asks for states whose values the release prints.
func TestSteamOverBothDoors(t *testing.T) {
	s := start(t)
	client := calandriav1.NewSteamServiceClient(s.connection)
	for _, c := range []struct {
		name, source string
		request      *calandriav1.GetSteamStateRequest
		want         float64 // kJ/kg
		tolerance    float64
	}{
		{"region 1", "IAPWS R7-97(2012) Table 5, 500 K and 3 MPa", &calandriav1.GetSteamStateRequest{PressureKpaAbs: proto.Float64(3000), TemperatureC: proto.Float64(226.85)}, 975.542239, 5e-7},
		{"region 2", "IAPWS R7-97(2012) Table 15, 700 K and 30 MPa", &calandriav1.GetSteamStateRequest{PressureKpaAbs: proto.Float64(30000), TemperatureC: proto.Float64(426.85)}, 2631.49474, 5e-6},
		{"region 3, by p and s", "IAPWS R7-97(2012) Table 33, 750 K and 500 kg/m3, whose p and s are rounded", &calandriav1.GetSteamStateRequest{PressureKpaAbs: proto.Float64(78309.5639), EntropyKjPerKgK: proto.Float64(4.46971906)}, 2258.68845, 1e-5},
		{"region 5, by p and s", "IAPWS R7-97(2012) Table 42, 2000 K and 30 MPa, whose s is rounded", &calandriav1.GetSteamStateRequest{PressureKpaAbs: proto.Float64(30000), EntropyKjPerKgK: proto.Float64(8.53640523)}, 6571.22604, 2e-5},
		{"region 2, by h and s", "IAPWS R7-97(2012) Table 15, 700 K and 3.5 kPa", &calandriav1.GetSteamStateRequest{EnthalpyKjPerKg: proto.Float64(3335.68375), EntropyKjPerKgK: proto.Float64(10.1749996)}, 3335.68375, 1e-8},
		{"saturated vapour", "common practice: near 2676 kJ/kg at 100 degC", &calandriav1.GetSteamStateRequest{TemperatureC: proto.Float64(100), DrynessFraction: proto.Float64(1)}, 2676, 1},
		{"wet", "common practice: half of the latent heat near 2257 above 419 kJ/kg at 100 degC", &calandriav1.GetSteamStateRequest{TemperatureC: proto.Float64(100), DrynessFraction: proto.Float64(0.5)}, 419 + 2257/2., 1},
	} {
		state, err := client.GetSteamState(t.Context(), c.request)
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		if !(math.Abs(state.GetEnthalpyKjPerKg()-c.want) <= c.tolerance) {
			t.Errorf("%s: h = %.9g, want %.9g (%s)", c.name, state.GetEnthalpyKjPerKg(), c.want, c.source)
		}
		query := url.Values{}
		flatten(c.request.ProtoReflect(), "", query)
		_, body := s.ask(t, http.MethodGet, "/v1/steam/state?"+query.Encode(), "")
		var overREST calandriav1.SteamState
		if err := protojson.Unmarshal([]byte(body), &overREST); err != nil || !proto.Equal(&overREST, state) {
			t.Errorf("%s: REST differs from gRPC: %v %s", c.name, err, body)
		}
		wet := c.name == "wet"
		if (state.SpecificHeatCpKjPerKgK == nil) != wet || strings.Contains(body, "specific_heat_cp") == wet {
			t.Errorf("%s: cp must be absent in wet steam, and only there: %s", c.name, body)
		}
	}
	for _, c := range []struct {
		pressure, latent, tolerance float64
	}{
		{101.41799, 2257, 1}, // common practice: latent heat near 2257 kJ/kg at 100 degC
		{143.3, 2230, 1},     // common practice: latent heat near 2230 kJ/kg at 110 degC
	} {
		saturation, err := client.GetSaturation(t.Context(), &calandriav1.GetSaturationRequest{PressureKpaAbs: proto.Float64(c.pressure)})
		if err != nil || !(math.Abs(saturation.GetLatentHeatKjPerKg()-c.latent) <= c.tolerance) {
			t.Errorf("latent heat at %g kPa is %v, want near %g: %v", c.pressure, saturation.GetLatentHeatKjPerKg(), c.latent, err)
		}
	}
}

func TestVerificationAndEngine(t *testing.T) {
	s := start(t)
	client := calandriav1.NewEngineServiceClient(s.connection)
	verification, err := client.VerifyEngine(t.Context(), &calandriav1.VerifyEngineRequest{})
	if err != nil || !verification.GetPassed() || verification.GetCount() != int32(len(verification.GetChecks())) || verification.GetCount() < 42 {
		t.Errorf("verification: %v, %v", verification, err)
	}
	described, err := client.GetEngine(t.Context(), &calandriav1.GetEngineRequest{})
	if err != nil || len(described.GetModels()) == 0 || described.GetLimits().GetRequestBytes() == 0 {
		t.Errorf("engine: %v, %v", described, err)
	}
}

func TestHealthReflectionAndIDs(t *testing.T) {
	s := start(t)
	for _, name := range []string{"", "calandria.v1.TrainService"} {
		answer, err := healthpb.NewHealthClient(s.connection).Check(t.Context(), &healthpb.HealthCheckRequest{Service: name})
		if err != nil || answer.GetStatus() != healthpb.HealthCheckResponse_SERVING {
			t.Errorf("health of %q: %v, %v", name, answer, err)
		}
	}
	stream, err := grpc_reflection_v1.NewServerReflectionClient(s.connection).ServerReflectionInfo(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	ask := &grpc_reflection_v1.ServerReflectionRequest{MessageRequest: &grpc_reflection_v1.ServerReflectionRequest_ListServices{}}
	if err := stream.Send(ask); err != nil {
		t.Fatal(err)
	}
	listed, err := stream.Recv()
	if err != nil || !strings.Contains(listed.String(), "calandria.v1.SteamService") {
		t.Errorf("reflection: %v, %v", listed, err)
	}
	if err := stream.CloseSend(); err != nil {
		t.Error(err)
	}

	var header metadata.MD
	ctx := metadata.AppendToOutgoingContext(t.Context(), "x-request-id", "shift-7.a")
	if _, err := calandriav1.NewEngineServiceClient(s.connection).GetEngine(ctx, &calandriav1.GetEngineRequest{}, grpc.Header(&header)); err != nil {
		t.Fatal(err)
	}
	if got := header.Get("x-request-id"); len(got) != 1 || got[0] != "shift-7.a" {
		t.Errorf("gRPC request id %q, want the caller's own", got)
	}
	response, _ := s.ask(t, http.MethodGet, "/v1/engine", "", "X-Request-Id", "shift-7.b")
	if got := response.Header.Get("X-Request-Id"); got != "shift-7.b" {
		t.Errorf("REST request id %q, want the caller's own", got)
	}
	response, _ = s.ask(t, http.MethodGet, "/v1/engine", "", "X-Request-Id", "a b")
	if got := response.Header.Get("X-Request-Id"); got == "a b" || got == "" {
		t.Errorf("REST request id %q, want a new one", got)
	}
	for name := range response.Header {
		if strings.HasPrefix(name, "Grpc-") {
			t.Errorf("header %s leaks", name)
		}
	}
}

// TestSameRefusalAtBothDoors holds gRPC and REST to the same reasons.
func TestSameRefusalAtBothDoors(t *testing.T) {
	s := start(t)
	for _, c := range []struct {
		reason calandriav1.Reason
		code   codes.Code
		body   string
	}{
		{calandriav1.Reason_REASON_FIELD_INVALID, codes.InvalidArgument, `{"feed":{"flow_kg_per_h":-1}}`},
		{calandriav1.Reason_REASON_UNDER_SPECIFIED, codes.InvalidArgument, `{"custom_liquor":{"rise_k":0,"specific_heat_kj_per_kg_k":4}}`},
		{calandriav1.Reason_REASON_OVER_SPECIFIED, codes.InvalidArgument, `{"custom_liquor":{"rise_k":0,"specific_heat_kj_per_kg_k":4},"steam":{"pressure_kpa_abs":100,"temperature_c":100}}`},
		// Theodore ex. 18.3 asks for 75 % caustic with steam of 340 degF; it
		// boils near 190 degC at 1 atm (from memory), hotter than that steam.
		{calandriav1.Reason_REASON_INFEASIBLE, codes.FailedPrecondition, `{"custom_liquor":{"rise_k":90,"specific_heat_kj_per_kg_k":3.2},"feed":{"flow_kg_per_h":4535.9,"solids_fraction":0.1,"temperature_c":25},"product":{"solids_fraction":0.75},"steam":{"temperature_c":171.1},"effect":{"pressure_kpa_abs":101.325,"coefficient_w_per_m2_k":2839}}`},
	} {
		var request calandriav1.SolveEffectRequest
		if err := protojson.Unmarshal([]byte(c.body), &request); err != nil {
			t.Fatal(err)
		}
		_, err := calandriav1.NewTrainServiceClient(s.connection).SolveEffect(t.Context(), &request)
		if got := statuses.Reason(status.Convert(err)); got != c.reason || status.Code(err) != c.code {
			t.Errorf("gRPC: %v %v, want %v: %v", status.Code(err), got, c.reason, err)
		}
		response, text := s.ask(t, http.MethodPost, "/v1/effects:solve", c.body)
		if response.StatusCode != statuses.HTTP(c.reason) || !strings.Contains(text, `"reason":"`+statuses.Word(c.reason)+`"`) {
			t.Errorf("REST: %d %s, want %v", response.StatusCode, text, c.reason)
		}
	}
}

// TestRefusedShapesOverGRPC sends requests over a real socket that no caller
// of this version should: too large, and with fields that do not exist.
func TestRefusedShapesOverGRPC(t *testing.T) {
	s := start(t)
	client := calandriav1.NewTrainServiceClient(s.connection)
	newer := func(m proto.Message) {
		// Field 1000, a varint: what a newer proto might have.
		m.ProtoReflect().SetUnknown(protowire.AppendVarint(protowire.AppendTag(nil, 1000, protowire.VarintType), 1))
	}
	var inside, within, large calandriav1.SolveEffectRequest
	for _, m := range []*calandriav1.SolveEffectRequest{&inside, &within, &large} {
		if err := protojson.Unmarshal([]byte(`{`+good+`}`), m); err != nil {
			t.Fatal(err)
		}
	}
	newer(&inside)
	within.CustomLiquor.Heat = &calandriav1.CustomLiquor_EnthalpyTable{EnthalpyTable: &calandriav1.EnthalpyTable{
		Rows: []*calandriav1.EnthalpyRow{{SolidsFraction: proto.Float64(0.1)}, {SolidsFraction: proto.Float64(0.2)}},
	}}
	newer(within.GetCustomLiquor().GetEnthalpyTable().GetRows()[1])
	large.CustomLiquor.Source = strings.Repeat("x", 2<<20)
	for _, c := range []struct {
		name    string
		request *calandriav1.SolveEffectRequest
		reason  calandriav1.Reason
		field   string
	}{
		{"unknown field", &inside, calandriav1.Reason_REASON_FIELD_INVALID, ""},
		{"unknown field in a list", &within, calandriav1.Reason_REASON_FIELD_INVALID, "custom_liquor.enthalpy_table.rows[1]"},
		{"too large", &large, calandriav1.Reason_REASON_TOO_LARGE, ""},
	} {
		answer, err := client.SolveEffect(t.Context(), c.request)
		refusal := status.Convert(err)
		violations := statuses.Violations(refusal)
		if answer != nil || refusal.Code() != codes.InvalidArgument || statuses.Reason(refusal) != c.reason || len(violations) != 1 || violations[0].GetField() != c.field {
			t.Errorf("%s: %v %v", c.name, answer, err)
		}
	}
}

func TestWillNotServeUnvetted(t *testing.T) {
	results := vetting.Run()
	results[3].Passed = false
	s, err := settings.Read(nil, func(string) string { return "" }, io.Discard)
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(t.Context(), 5*time.Second)
	defer cancel()
	err = serve(ctx, s, slog.New(slog.DiscardHandler), results, nil)
	if !errors.Is(err, errUnvetted) || !strings.Contains(err.Error(), results[3].ID) {
		t.Errorf("got %v, want a refusal that names %s", err, results[3].ID)
	}
}
