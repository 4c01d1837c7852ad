package convert

import (
	"encoding/json"
	"math"
	"os"
	"strings"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/reflect/protoreflect"

	"calandria.example/calandria/engine/train"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// TestWorkedExamples solves the worked examples of textbooks. Each names its
// source and how its values came to be known; the tolerances stand beside the
// values with their reasons.
func TestWorkedExamples(t *testing.T) {
	text, err := os.ReadFile("../../testdata/published/effects.json")
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
	if len(file.Examples) != 10 {
		t.Errorf("%d examples, want 10", len(file.Examples))
	}
	for _, e := range file.Examples {
		t.Run(e.ID, func(t *testing.T) {
			var request calandriav1.SolveEffectRequest
			if err := protojson.Unmarshal(e.Request, &request); err != nil {
				t.Fatal(err)
			}
			plant, err := EffectRequest(&request)
			if err != nil {
				t.Fatal(err)
			}
			answer, err := train.Solve(plant)
			if err != nil {
				t.Fatal(err)
			}
			solution := EffectSolution(answer)
			for _, x := range e.Expected {
				got := number(t, solution.ProtoReflect(), x.Field)
				deviation := 100 * (got/x.Value - 1)
				t.Logf("%s %s: %.6g against %.6g, %+.3f %% (allowed %g %%)", e.Source, x.Field, got, x.Value, deviation, x.Tolerance)
				if !(math.Abs(deviation) <= x.Tolerance) {
					t.Errorf("%s is %.6g, published %.6g: %+.3f %%, allowed %g %%", x.Field, got, x.Value, deviation, x.Tolerance)
				}
			}
		})
	}
}

func number(t *testing.T, m protoreflect.Message, path string) float64 {
	t.Helper()
	names := strings.Split(path, ".")
	for _, name := range names[:len(names)-1] {
		m = m.Get(m.Descriptor().Fields().ByName(protoreflect.Name(name))).Message()
	}
	field := m.Descriptor().Fields().ByName(protoreflect.Name(names[len(names)-1]))
	if field == nil {
		t.Fatalf("no field %s", path)
	}
	return m.Get(field).Float()
}
