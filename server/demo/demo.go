// Package demo solves the demo scenario through the service's own public
// doors, as a caller would, and shows it to a person.
package demo

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"net/http"
	"strconv"
	"strings"

	"google.golang.org/grpc"
	"google.golang.org/grpc/credentials/insecure"
	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/reflect/protoreflect"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	scenarios "calandria.example/calandria/testdata/demo"
)

type scenario struct {
	Title, About string
	Questions    []question
}

type question struct {
	Key, Name, Ask string
	Request        json.RawMessage
}

// row is one line of the table.
type row struct {
	label, unit, path string
	decimals          int
	scale             float64
}

var rows = []row{
	{"feed", "kg/h", "feed.flow_kg_per_h", 0, 1},
	{"feed temperature", "degC", "feed.temperature_c", 1, 1},
	{"solids in", "%", "feed.solids_fraction", 2, 100},
	{"solids out", "%", "product.solids_fraction", 2, 100},
	{"product", "kg/h", "product.flow_kg_per_h", 0, 1},
	{"evaporated", "kg/h", "evaporation_kg_per_h", 0, 1},
	{"live steam", "kPa absolute", "steam.pressure_kpa_abs", 1, 1},
	{"live steam", "kg/h", "steam.flow_kg_per_h", 0, 1},
	{"vapour space", "kPa absolute", "effect.pressure_kpa_abs", 1, 1},
	{"chest", "degC", "effect.chest_temperature_c", 2, 1},
	{"boiling liquor", "degC", "effect.boiling_temperature_c", 2, 1},
	{"boiling-point rise", "K", "effect.boiling_point_rise_k", 2, 1},
	{"driving force", "K", "effect.driving_force_k", 2, 1},
	{"duty", "kW", "effect.duty_kw", 1, 1},
	{"coefficient", "W/(m2 K)", "effect.coefficient_w_per_m2_k", 0, 1},
	{"area", "m2", "effect.area_m2", 2, 1},
	{"economy", "kg/kg", "economy", 3, 1},
}

// Run asks the questions of the scenario over gRPC at grpcAddress, asks them
// again over REST at httpURL, and writes the answers to out.
func Run(ctx context.Context, grpcAddress, httpURL string, out io.Writer) error {
	var s scenario
	if err := json.Unmarshal(scenarios.Syrup, &s); err != nil {
		return fmt.Errorf("scenario: %w", err)
	}
	connection, err := grpc.NewClient(grpcAddress, grpc.WithTransportCredentials(insecure.NewCredentials()))
	if err != nil {
		return err
	}
	defer connection.Close()
	client := calandriav1.NewTrainServiceClient(connection)
	requests := make([]*calandriav1.SolveEffectRequest, len(s.Questions))
	solutions := make([]*calandriav1.EffectSolution, len(s.Questions))
	apart := 0.0
	for i, q := range s.Questions {
		requests[i] = new(calandriav1.SolveEffectRequest)
		if err := protojson.Unmarshal(q.Request, requests[i]); err != nil {
			return fmt.Errorf("question %s: %w", q.Key, err)
		}
		if solutions[i], err = client.SolveEffect(ctx, requests[i]); err != nil {
			return fmt.Errorf("question %s over gRPC: %w", q.Key, err)
		}
		again, err := overREST(ctx, httpURL, q.Request)
		if err != nil {
			return fmt.Errorf("question %s over REST: %w", q.Key, err)
		}
		for _, r := range rows {
			a, _ := value(solutions[i].ProtoReflect(), r.path)
			b, _ := value(again.ProtoReflect(), r.path)
			apart = math.Max(apart, math.Abs(a-b)/math.Max(math.Abs(a), 1))
		}
	}
	text := render(&s, requests, solutions)
	fmt.Fprintf(&text, "\n  balances close to %.0e; gRPC and REST differ by %g\n", closure(solutions), apart)
	compact := new(bytes.Buffer)
	if err := json.Compact(compact, s.Questions[0].Request); err != nil {
		return err
	}
	fmt.Fprintf(&text, `
  A calculation is no permission: steam, vacuum and hot liquor injure. Local
  codes and licensed engineers decide on pressure parts, relief and operation.

  gRPC  %s (reflection is on)
  REST  %s (GET / lists the paths)

Ask question A yourself:

curl -s %s/v1/effects:solve -d '%s'

Or one number, as a spreadsheet cell would:

curl -s '%s/v1/steam/saturation?pressure_kpa_abs=24&pick=latent_heat_kj_per_kg'

Still serving; Ctrl-C stops.
`, grpcAddress, httpURL, httpURL, compact, httpURL)
	_, err = io.Copy(out, &text)
	return err
}

func overREST(ctx context.Context, httpURL string, body []byte) (*calandriav1.EffectSolution, error) {
	request, err := http.NewRequestWithContext(ctx, http.MethodPost, httpURL+"/v1/effects:solve", bytes.NewReader(body))
	if err != nil {
		return nil, err
	}
	request.Header.Set("Content-Type", "application/json")
	response, err := http.DefaultClient.Do(request)
	if err != nil {
		return nil, err
	}
	defer response.Body.Close()
	text, err := io.ReadAll(response.Body)
	if err != nil {
		return nil, err
	}
	if response.StatusCode != http.StatusOK {
		return nil, fmt.Errorf("%s: %s", response.Status, text)
	}
	solution := new(calandriav1.EffectSolution)
	return solution, protojson.Unmarshal(text, solution)
}

const (
	labelWidth = 19
	unitWidth  = 14
	valueWidth = 13
)

func render(s *scenario, requests []*calandriav1.SolveEffectRequest, solutions []*calandriav1.EffectSolution) bytes.Buffer {
	var b bytes.Buffer
	fmt.Fprintf(&b, "\n%s\n", s.Title)
	for _, line := range wrap(s.About, 76) {
		fmt.Fprintf(&b, "  %s\n", line)
	}
	fmt.Fprintln(&b)
	for _, q := range s.Questions {
		fmt.Fprintf(&b, "  %s  %s\n", q.Key, q.Ask)
	}
	fmt.Fprintf(&b, "\n  %*s", labelWidth+unitWidth-1, "")
	for _, q := range s.Questions {
		fmt.Fprintf(&b, "%*s", valueWidth, q.Key+" "+q.Name)
	}
	fmt.Fprintf(&b, "\n  %s\n", strings.Repeat("-", labelWidth+unitWidth+valueWidth*len(s.Questions)))
	for _, r := range rows {
		fmt.Fprintf(&b, "  %-*s%-*s", labelWidth, r.label, unitWidth, r.unit)
		for i := range s.Questions {
			v, _ := value(solutions[i].ProtoReflect(), r.path)
			mark := "*"
			if _, given := value(requests[i].ProtoReflect(), r.path); given {
				mark = " "
			}
			fmt.Fprintf(&b, "%*s%s", valueWidth-1, strconv.FormatFloat(v*r.scale, 'f', r.decimals, 64), mark)
		}
		b.Truncate(len(bytes.TrimRight(b.Bytes(), " ")))
		fmt.Fprintln(&b)
	}
	fmt.Fprintf(&b, "\n  * solved for: what a question leaves out is found\n")
	return b
}

func closure(solutions []*calandriav1.EffectSolution) float64 {
	worst := 1e-16
	for _, s := range solutions {
		c := s.GetClosure()
		worst = max(worst, c.GetMass(), c.GetSolids(), c.GetEnergy())
	}
	return worst
}

// value reads a number by its path; ok is false if it is absent.
func value(m protoreflect.Message, path string) (v float64, ok bool) {
	names := strings.Split(path, ".")
	for i, name := range names {
		field := m.Descriptor().Fields().ByName(protoreflect.Name(name))
		if field == nil || !m.Has(field) && field.HasPresence() {
			return 0, false
		}
		if i == len(names)-1 {
			return m.Get(field).Float(), true
		}
		m = m.Get(field).Message()
	}
	return 0, false
}

// wrap breaks a text into lines of at most width characters.
func wrap(text string, width int) []string {
	var lines []string
	line := ""
	for _, word := range strings.Fields(text) {
		if line != "" && len(line)+1+len(word) > width {
			lines = append(lines, line)
			line = ""
		}
		if line != "" {
			line += " "
		}
		line += word
	}
	return append(lines, line)
}
