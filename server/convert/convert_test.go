package convert

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	validate "buf.build/gen/go/bufbuild/protovalidate/protocolbuffers/go/buf/validate"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"

	"calandria.example/calandria/engine/fault"
	"calandria.example/calandria/engine/train"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// TestUnits holds each suffix to its unit's definition (SI brochure, 9th ed.).
func TestUnits(t *testing.T) {
	for _, c := range []struct {
		field         string
		practical, si float64
	}{
		{"flow_kg_per_h", 3600, 1}, {"pressure_kpa_abs", 101.325, 101325}, {"temperature_c", 100, 373.15}, {"superheat_k", 5, 5},
		{"duty_kw", 2, 2000}, {"area_m2", 7, 7}, {"coefficient_w_per_m2_k", 1500, 1500}, {"gas_side_resistance_m2_k_per_w", 1e-4, 1e-4},
		{"enthalpy_kj_per_kg", 419, 419e3}, {"entropy_kj_per_kg_k", 4.2, 4200}, {"solids_fraction", 0.3, 0.3}, {"solids_fraction_out", 0.3, 0.3},
		{"entrainment_kg_per_kg", 0.01, 0.01}, {"economy", 0.9, 0.9},
	} {
		if got := toSI(c.field, c.practical); math.Abs(got-c.si) > 1e-12*math.Abs(c.si) {
			t.Errorf("%s: %g is %g in SI, want %g", c.field, c.practical, got, c.si)
		}
		if got := FromSI(c.field, c.si); math.Abs(got-c.practical) > 1e-12*math.Abs(c.practical) {
			t.Errorf("%s: %g in SI is %g, want %g", c.field, c.si, got, c.practical)
		}
	}
}

// TestEveryNumberOfARequestArrives sets every number that a request can hold
// to a value of its own, and expects each at the number of the same path: none
// lost, none in another's place.
func TestEveryNumberOfARequestArrives(t *testing.T) {
	zero := 0.0
	request := &calandriav1.SolveEffectRequest{
		CustomLiquor: &calandriav1.CustomLiquor{
			Rise: &calandriav1.CustomLiquor_RiseK{RiseK: zero}, Heat: &calandriav1.CustomLiquor_SpecificHeatKjPerKgK{SpecificHeatKjPerKgK: 4},
		},
	}
	want := map[string]float64{}
	var fill func(m protoreflect.Message, prefix string)
	fill = func(m protoreflect.Message, prefix string) {
		fields := m.Descriptor().Fields()
		for i := range fields.Len() {
			f := fields.Get(i)
			switch path := prefix + string(f.Name()); {
			case f.Kind() == protoreflect.DoubleKind:
				value := float64(len(want) + 1)
				want[path] = value
				m.Set(f, protoreflect.ValueOfFloat64(value))
			case f.Kind() == protoreflect.MessageKind && path != "custom_liquor" && path != "liquor":
				fill(m.Mutable(f).Message(), path+".")
			}
		}
	}
	fill(request.ProtoReflect(), "")
	plant, err := EffectRequest(request)
	if err != nil {
		t.Fatal(err)
	}
	if len(plant.Given) != len(want) {
		t.Errorf("%d numbers arrived of %d", len(plant.Given), len(want))
	}
	for _, g := range plant.Given {
		if got := FromSI(g.Number.Path(), g.Value); math.Abs(got-want[g.Number.Path()]) > 1e-9 {
			t.Errorf("%s arrived as %g, was %g", g.Number.Path(), got, want[g.Number.Path()])
		}
	}
}

// TestEveryNumberOfAnAnswerLeaves gives every number of an answer a value of
// its own, and expects each at the field of the same path.
func TestEveryNumberOfAnAnswerLeaves(t *testing.T) {
	var a train.Answer
	for n := range train.Number(len(a.Value)) {
		a.Value[n] = toSI(n.Path(), float64(n+1))
	}
	solution := EffectSolution(&a).ProtoReflect()
	for n := range train.Number(len(a.Value)) {
		m := solution
		names := strings.Split(n.Path(), ".")
		for _, name := range names[:len(names)-1] {
			m = m.Get(m.Descriptor().Fields().ByName(protoreflect.Name(name))).Message()
		}
		field := m.Descriptor().Fields().ByName(protoreflect.Name(names[len(names)-1]))
		if field == nil {
			t.Errorf("no field %s", n.Path())
		} else if got := m.Get(field).Float(); math.Abs(got-float64(n+1)) > 1e-9 {
			t.Errorf("%s leaves as %g, was %d", n.Path(), got, n+1)
		}
	}
}

// TestAStateAmongManyTakesNoMemory: what a state needs is there before it is
// computed, up to the columns that grow with those that have the number.
func TestAStateAmongManyTakesNoMemory(t *testing.T) {
	const runs = 1000
	request := &calandriav1.ComputeSteamStatesRequest{Want: []string{"region", "phase", "temperature_c", "density_kg_per_m3"}}
	for i := range runs + 1 { // one to warm up
		request.PressureKpaAbs = append(request.PressureKpaAbs, 20+float64(i))
		request.EnthalpyKjPerKg = append(request.EnthalpyKjPerKg, 100+3*float64(i))
	}
	columns, err := SteamStatesRequest(request)
	if err != nil {
		t.Fatal(err)
	}
	i := 0
	if n := testing.AllocsPerRun(runs, func() {
		if err := columns.Compute(i); err != nil {
			t.Fatal(err)
		}
		i++
	}); n != 0 || len(columns.Answer().GetTemperatureC()) != runs+1 {
		t.Errorf("%g allocations a state, %d states", n, len(columns.Answer().GetTemperatureC()))
	}
}

// TestPairs gives every one and every two of the coordinates: the pairs that
// the contract names are answered, the others refused, and of one coordinate
// exactly its partners are asked for.
func TestPairs(t *testing.T) {
	partners := map[string][]string{ // as the contract has them
		"pressure_kpa_abs":    {"temperature_c", "dryness_fraction", "enthalpy_kj_per_kg", "entropy_kj_per_kg_k"},
		"temperature_c":       {"pressure_kpa_abs", "dryness_fraction"},
		"dryness_fraction":    {"pressure_kpa_abs", "temperature_c"},
		"enthalpy_kj_per_kg":  {"pressure_kpa_abs", "entropy_kj_per_kg_k"},
		"entropy_kj_per_kg_k": {"pressure_kpa_abs", "enthalpy_kj_per_kg"},
	}
	// Wet steam of 100 kPa, near enough by common practice for each pair to
	// have a state.
	values := map[string]float64{"pressure_kpa_abs": 100, "temperature_c": 90, "dryness_fraction": 0.9, "enthalpy_kj_per_kg": 2450, "entropy_kj_per_kg_k": 6.75}
	given := func(names ...string) *calandriav1.GetSteamStateRequest {
		request := &calandriav1.GetSteamStateRequest{}
		for _, name := range names {
			m := request.ProtoReflect()
			m.Set(m.Descriptor().Fields().ByName(protoreflect.Name(name)), protoreflect.ValueOfFloat64(values[name]))
		}
		return request
	}
	coordinates, fields := 0, given().ProtoReflect().Descriptor().Fields()
	for i := range fields.Len() {
		if fields.Get(i).Kind() == protoreflect.DoubleKind {
			coordinates++
		}
	}
	if coordinates != len(partners) {
		t.Fatalf("%d coordinates", coordinates)
	}
	for first, with := range partners {
		_, err := SteamRequest(given(first))
		var few *fault.Specification
		if !errors.As(err, &few) || few.Over || few.Missing != 1 || !slices.Equal(few.Closers, with) {
			t.Errorf("%s alone: %v", first, err)
		}
		for second := range partners {
			if second == first {
				continue
			}
			_, err := SteamRequest(given(first, second))
			var refused *fault.Invalid
			if slices.Contains(with, second) {
				if err != nil {
					t.Errorf("%s with %s: %v", first, second, err)
				}
			} else if !errors.As(err, &refused) || !strings.Contains(refused.Limit, "pressure_kpa_abs with enthalpy_kj_per_kg") {
				t.Errorf("%s with %s: %v", first, second, err)
			}
		}
	}
}

// TestWantedAndNothingElse asks for each column alone.
func TestWantedAndNothingElse(t *testing.T) {
	answer := (&calandriav1.SteamStates{}).ProtoReflect().Descriptor().Fields()
	always := []string{"index", "advisories", "failures", "provenance"}
	asked := 0
	for i := range answer.Len() {
		name := string(answer.Get(i).Name())
		if slices.Contains(always, name) {
			continue
		}
		asked++
		columns, err := SteamStatesRequest(&calandriav1.ComputeSteamStatesRequest{TemperatureC: []float64{100}, DrynessFraction: []float64{1}, Want: []string{name}})
		if err != nil {
			t.Fatal(err)
		}
		if err := columns.Compute(0); err != nil {
			t.Fatal(err)
		}
		var got []string
		columns.Answer().ProtoReflect().Range(func(f protoreflect.FieldDescriptor, _ protoreflect.Value) bool {
			if !slices.Contains(always, string(f.Name())) {
				got = append(got, string(f.Name()))
			}
			return true
		})
		if !slices.Equal(got, []string{name}) {
			t.Errorf("%s wanted, got %v", name, got)
		}
	}
	want := (&calandriav1.ComputeSteamStatesRequest{}).ProtoReflect().Descriptor().Fields().ByName("want")
	rules, ok := proto.GetExtension(want.Options(), validate.E_Field).(*validate.FieldRules)
	if in := rules.GetRepeated().GetItems().GetString().GetIn(); !ok || asked != len(in) {
		t.Errorf("%d columns can be asked for, there are %d", len(in), asked)
	}
}
