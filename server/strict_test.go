package main

import (
	"encoding/json"
	"fmt"
	"net/http"
	"os"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"calandria.example/calandria/engine"
	"calandria.example/calandria/server/gateway"
)

const good = `"custom_liquor":{"rise_k":0,"specific_heat_kj_per_kg_k":4},"feed":{"flow_kg_per_h":1000,"solids_fraction":0.1,"temperature_c":50},"product":{"solids_fraction":0.4},"steam":{"pressure_kpa_abs":200},"effect":{"pressure_kpa_abs":20,"coefficient_w_per_m2_k":2000}`

// describedBy compiles the schemas of the service's own description.
func describedBy(t *testing.T) func(name, text string) error {
	t.Helper()
	raw, err := os.ReadFile("gateway/openapi.json")
	if err != nil {
		t.Fatal(err)
	}
	document, err := jsonschema.UnmarshalJSON(strings.NewReader(string(raw)))
	if err != nil {
		t.Fatal(err)
	}
	compiler := jsonschema.NewCompiler()
	compiler.DefaultDraft(jsonschema.Draft2020)
	if err := compiler.AddResource("openapi.json", document); err != nil {
		t.Fatal(err)
	}
	return func(name, text string) error {
		schema, err := compiler.Compile("openapi.json#/components/schemas/" + name)
		if err != nil {
			return err
		}
		value, err := jsonschema.UnmarshalJSON(strings.NewReader(text))
		if err != nil {
			return err
		}
		return schema.Validate(value)
	}
}

// TestBadInput sends what callers get wrong. Each must be refused with the
// status and with words that name the field and the way out, as a problem
// that the description allows.
func TestBadInput(t *testing.T) {
	s := start(t)
	valid := describedBy(t)
	const solve, saturation, state, states = "/v1/effects:solve", "/v1/steam/saturation", "/v1/steam/state", "/v1/steam/states:compute"
	deep := strings.Repeat("[", 50) + strings.Repeat("]", 50)
	bomb := strings.Repeat("[", 200_000) + strings.Repeat("]", 200_000)
	for _, c := range []struct {
		name, method, path, body string
		header                   []string
		status                   int
		reason                   string
		words                    []string // each must stand in the answer
	}{
		{"unknown parameter", "GET", saturation + "?pressure_kpa=100", "", nil, 400, "FIELD_INVALID", []string{"Did you mean pressure_kpa_abs?"}},
		{"lower camel parameter", "GET", saturation + "?pressureKpaAbs=100", "", nil, 400, "FIELD_INVALID", []string{"pressure_kpa_abs"}},
		{"parameter twice", "GET", saturation + "?pressure_kpa_abs=1&pressure_kpa_abs=2", "", nil, 400, "FIELD_INVALID", []string{"given twice"}},
		{"decimal comma in a query", "GET", saturation + "?pressure_kpa_abs=101,3", "", nil, 400, "FIELD_INVALID", []string{"write 101.3"}},
		{"NaN in a query", "GET", saturation + "?pressure_kpa_abs=NaN", "", nil, 400, "FIELD_INVALID", []string{"finite number"}},
		{"infinity in a query", "GET", saturation + "?temperature_c=-Inf", "", nil, 400, "FIELD_INVALID", []string{"finite number"}},
		{"hexadecimal", "GET", saturation + "?pressure_kpa_abs=0x10", "", nil, 400, "FIELD_INVALID", []string{"0x10"}},
		{"digits with underscores", "GET", saturation + "?pressure_kpa_abs=1_000", "", nil, 400, "FIELD_INVALID", []string{"1_000"}},
		{"unit in the value", "GET", saturation + "?pressure_kpa_abs=1.2bar", "", nil, 400, "FIELD_INVALID", []string{"kPa absolute"}},
		{"too large a number in a query", "GET", saturation + "?pressure_kpa_abs=1e999", "", nil, 400, "FIELD_INVALID", []string{"too large"}},
		{"empty value", "GET", saturation + "?pressure_kpa_abs=", "", nil, 400, "FIELD_INVALID", []string{"empty"}},
		{"semicolon", "GET", saturation + "?pressure_kpa_abs=1;temperature_c=2", "", nil, 400, "FIELD_INVALID", []string{"semicolons"}},
		{"broken escape", "GET", saturation + "?pressure_kpa_abs=%zz", "", nil, 400, "FIELD_INVALID", []string{"%XX"}},
		{"nothing given", "GET", saturation, "", nil, 400, "UNDER_SPECIFIED", []string{"pressure_kpa_abs", "temperature_c"}},
		{"one of two given", "GET", state + "?temperature_c=50", "", nil, 400, "UNDER_SPECIFIED", []string{"dryness_fraction"}},
		{"both given", "GET", saturation + "?pressure_kpa_abs=100&temperature_c=100", "", nil, 400, "OVER_SPECIFIED", []string{"Drop any one"}},
		{"gauge pressure", "GET", saturation + "?pressure_kpa_abs=-20", "", nil, 400, "FIELD_INVALID", []string{"gauge", "above 0 and at most 100000 kPa absolute"}},
		{"percent", "GET", state + "?pressure_kpa_abs=100&dryness_fraction=95", "", nil, 400, "FIELD_INVALID", []string{"percentage", "0.95"}},
		{"too hot for saturation", "GET", saturation + "?temperature_c=400", "", nil, 400, "OUTSIDE_CORRELATION", []string{"temperature_c", "degC", "IAPWS"}},
		{"too cold a pressure", "GET", saturation + "?pressure_kpa_abs=0.1", "", nil, 400, "OUTSIDE_CORRELATION", []string{"0.1", "kPa absolute"}},
		{"too much pressure for 900 degC", "GET", state + "?pressure_kpa_abs=60000&temperature_c=900", "", nil, 400, "OUTSIDE_CORRELATION", []string{"60000", "50000 kPa absolute"}},
		{"all but no pressure", "GET", state + "?pressure_kpa_abs=1e-300&temperature_c=90", "", nil, 400, "OUTSIDE_CORRELATION", []string{"pressure_kpa_abs", "R7-97"}},
		{"one coordinate", "GET", state + "?entropy_kj_per_kg_k=5", "", nil, 400, "UNDER_SPECIFIED", []string{"pressure_kpa_abs", "enthalpy_kj_per_kg"}},
		{"a pair that may have two states", "GET", state + "?temperature_c=50&enthalpy_kj_per_kg=209", "", nil, 400, "FIELD_INVALID", []string{"given with temperature_c", "enthalpy_kj_per_kg with entropy_kj_per_kg_k"}},
		{"three coordinates", "GET", state + "?pressure_kpa_abs=100&enthalpy_kj_per_kg=209&entropy_kj_per_kg_k=1", "", nil, 400, "OVER_SPECIFIED", []string{"Drop any one"}},
		{"five coordinates", "GET", state + "?pressure_kpa_abs=100&temperature_c=20&dryness_fraction=0&enthalpy_kj_per_kg=209&entropy_kj_per_kg_k=1", "", nil, 400, "OVER_SPECIFIED", []string{"at most 2 of this set"}},
		{"enthalpy in J/kg", "GET", state + "?pressure_kpa_abs=100&enthalpy_kj_per_kg=2700000", "", nil, 400, "FIELD_INVALID", []string{"at most 10000 kJ/kg"}},
		{"enthalpy of no state", "GET", state + "?pressure_kpa_abs=100&enthalpy_kj_per_kg=9000", "", nil, 400, "OUTSIDE_CORRELATION", []string{"enthalpy_kj_per_kg", "at this pressure", "kJ/kg"}},
		{"entropy of no state", "GET", state + "?pressure_kpa_abs=100&entropy_kj_per_kg_k=-5", "", nil, 400, "OUTSIDE_CORRELATION", []string{"entropy_kj_per_kg_k", "kJ/(kg K)"}},
		{"no such enthalpy at an entropy", "GET", state + "?enthalpy_kj_per_kg=9000&entropy_kj_per_kg_k=5", "", nil, 400, "OUTSIDE_CORRELATION", []string{"at this entropy"}},
		{"no columns", "POST", states, `{}`, nil, 400, "UNDER_SPECIFIED", []string{"pressure_kpa_abs"}},
		{"empty columns", "POST", states, `{"pressure_kpa_abs":[],"temperature_c":[]}`, nil, 400, "UNDER_SPECIFIED", []string{"pressure_kpa_abs"}},
		{"one column", "POST", states, `{"pressure_kpa_abs":[1,2]}`, nil, 400, "UNDER_SPECIFIED", []string{"temperature_c"}},
		{"three columns", "POST", states, `{"pressure_kpa_abs":[1],"temperature_c":[1],"enthalpy_kj_per_kg":[1]}`, nil, 400, "OVER_SPECIFIED", []string{"Drop any one"}},
		{"columns that make no pair", "POST", states, `{"temperature_c":[1],"entropy_kj_per_kg_k":[1]}`, nil, 400, "FIELD_INVALID", []string{"given with temperature_c"}},
		{"columns of two lengths", "POST", states, `{"pressure_kpa_abs":[1,2],"temperature_c":[1]}`, nil, 400, "FIELD_INVALID", []string{"temperature_c is 1 long", "as many as pressure_kpa_abs has, 2"}},
		{"number for a column", "POST", states, `{"pressure_kpa_abs":5,"temperature_c":[1]}`, nil, 400, "FIELD_INVALID", []string{"a list in square brackets"}},
		{"object for a column", "POST", states, `{"pressure_kpa_abs":{"a":1},"temperature_c":[1]}`, nil, 400, "FIELD_INVALID", []string{"a list in square brackets"}},
		{"text in a column", "POST", states, `{"pressure_kpa_abs":[1,"x",3],"temperature_c":[1,2,3]}`, nil, 400, "FIELD_INVALID", []string{"pressure_kpa_abs[1]", "kPa absolute"}},
		{"null in a column", "POST", states, `{"pressure_kpa_abs":[1,null],"temperature_c":[1,2]}`, nil, 400, "FIELD_INVALID", []string{"pressure_kpa_abs[1]", "take this item out"}},
		{"too large a number in a column", "POST", states, `{"pressure_kpa_abs":[1,1e999],"temperature_c":[1,2]}`, nil, 400, "FIELD_INVALID", []string{"pressure_kpa_abs[1]", "too large"}},
		{"NaN in a column", "POST", states, `{"pressure_kpa_abs":[1,NaN],"temperature_c":[1,2]}`, nil, 400, "FIELD_INVALID", []string{"JSON has no NaN"}},
		{"broken JSON far into a column", "POST", states, "{\"pressure_kpa_abs\":[\n1" + strings.Repeat(",\n1", 5000) + `,1.2.3],"temperature_c":[1,2]}`, nil, 400, "FIELD_INVALID", []string{"not JSON near line 5002"}},
		{"decimal comma in a column", "POST", states, `{"pressure_kpa_abs":["1,5",2],"temperature_c":[1,2]}`, nil, 400, "FIELD_INVALID", []string{"pressure_kpa_abs[0]", "write 1.5"}},
		{"rows for columns", "POST", states, `{"pressure_kpa_abs":[[1,2],[3,4]],"temperature_c":[1,2]}`, nil, 400, "FIELD_INVALID", []string{"pressure_kpa_abs[0]", "a list"}},
		{"list of objects for the request", "POST", states, `[{"pressure_kpa_abs":1,"temperature_c":1}]`, nil, 400, "FIELD_INVALID", []string{"a JSON object"}},
		{"unknown column wanted", "POST", states, `{"pressure_kpa_abs":[1],"temperature_c":[1],"want":["density"]}`, nil, 400, "FIELD_INVALID", []string{"want[0]", "Did you mean density_kg_per_m3?"}},
		{"column that every answer has", "POST", states, `{"pressure_kpa_abs":[1],"temperature_c":[1],"want":["index"]}`, nil, 400, "FIELD_INVALID", []string{"want[0]", "one of region, phase"}},
		{"column wanted twice", "POST", states, `{"pressure_kpa_abs":[1],"temperature_c":[1],"want":["region","region"]}`, nil, 400, "FIELD_INVALID", []string{"want", "each once", `\"region\" stands there twice`}},
		{"too many states", "POST", states, `{"pressure_kpa_abs":[1` + strings.Repeat(",1", 20_000) + `],"temperature_c":[1` + strings.Repeat(",1", 20_000) + `]}`, nil, 400, "FIELD_INVALID", []string{"at most 20000 items"}},
		{"states by GET", "GET", states + "?pressure_kpa_abs=1&temperature_c=1", "", nil, 405, "METHOD_NOT_ALLOWED", nil},
		{"group for a value", "GET", solve + "?feed=1", "", nil, 400, "FIELD_INVALID", []string{"feed.flow_kg_per_h"}},
		{"below a value", "GET", solve + "?economy.x=1", "", nil, 400, "FIELD_INVALID", []string{"Nothing stands below"}},
		{"table by GET", "GET", solve + "?custom_liquor.enthalpy_table.rows.solids_fraction=1", "", nil, 400, "FIELD_INVALID", []string{"POST"}},
		{"errors without pick", "GET", saturation + "?temperature_c=1&errors=inline", "", nil, 400, "FIELD_INVALID", []string{"pick"}},
		{"no body", "POST", solve, "", nil, 400, "FIELD_INVALID", []string{"empty"}},
		{"list as body", "POST", solve, `[]`, nil, 400, "FIELD_INVALID", []string{"a JSON object"}},
		{"null as body", "POST", solve, `null`, nil, 400, "FIELD_INVALID", []string{"null"}},
		{"unknown field", "POST", solve, `{` + good + `,"feeed":1}`, nil, 400, "FIELD_INVALID", []string{"Did you mean feed?"}},
		{"lower camel field", "POST", solve, `{"customLiquor":{}}`, nil, 400, "FIELD_INVALID", []string{"custom_liquor"}},
		{"key twice", "POST", solve, `{` + good + `,"find":[],"find":[]}`, nil, 400, "FIELD_INVALID", []string{"given twice"}},
		{"data behind", "POST", solve, `{` + good + `} x`, nil, 400, "FIELD_INVALID", []string{"more data"}},
		{"two objects", "POST", solve, `{` + good + `}{` + good + `}`, nil, 400, "FIELD_INVALID", []string{"more data"}},
		{"NaN token", "POST", solve, `{"economy":NaN}`, nil, 400, "FIELD_INVALID", []string{"JSON has no NaN"}},
		{"infinity token", "POST", solve, `{"economy": -Infinity}`, nil, 400, "FIELD_INVALID", []string{"JSON has no NaN"}},
		{"NaN text", "POST", solve, `{"economy":"NaN"}`, nil, 400, "FIELD_INVALID", []string{"finite number"}},
		{"text for a number", "POST", solve, `{"economy":"much"}`, nil, 400, "FIELD_INVALID", []string{"much"}},
		{"number in quotes", "POST", solve, `{"economy":"1.5"}`, nil, 400, "FIELD_INVALID", []string{"without quotes"}},
		{"decimal comma", "POST", solve, `{"economy":1,5}`, nil, 400, "FIELD_INVALID", []string{"decimal comma"}},
		{"decimal comma in quotes", "POST", solve, `{"economy":"1,5"}`, nil, 400, "FIELD_INVALID", []string{"write 1.5"}},
		{"null", "POST", solve, `{"economy":null}`, nil, 400, "FIELD_INVALID", []string{"Leave the field out"}},
		{"truth value", "POST", solve, `{"economy":true}`, nil, 400, "FIELD_INVALID", []string{"a number"}},
		{"object for a number", "POST", solve, `{"economy":{"a":[1]}}`, nil, 400, "FIELD_INVALID", []string{"an object"}},
		{"number for an object", "POST", solve, `{"feed":5}`, nil, 400, "FIELD_INVALID", []string{"flow_kg_per_h"}},
		{"object for a list", "POST", solve, `{"find":{}}`, nil, 400, "FIELD_INVALID", []string{"a list"}},
		{"number for a text", "POST", solve, `{"find":[1]}`, nil, 400, "FIELD_INVALID", []string{"find[0]"}},
		{"unknown find", "POST", solve, `{` + good + `,"find":["effect.area_m2"]}`, nil, 400, "FIELD_INVALID", []string{"find[0]", "effect.vent_fraction"}},
		{"find twice", "POST", solve, `{` + good + `,"find":["effect.vent_fraction","effect.vent_fraction"]}`, nil, 400, "FIELD_INVALID", []string{"each once", `\"effect.vent_fraction\" stands there twice`}},
		{"too large a number", "POST", solve, `{"economy":1e999}`, nil, 400, "FIELD_INVALID", []string{"too large"}},
		{"cut off", "POST", solve, `{"feed":{"flow_kg_per_h":5`, nil, 400, "FIELD_INVALID", []string{"cut off"}},
		{"broken JSON", "POST", solve, `{"feed" "x"}`, nil, 400, "FIELD_INVALID", []string{"not JSON near line 1"}},
		{"many at once", "POST", solve, `{"feed":{"flow_kg_per_h":-5,"solids_fraction":18,"temprature_c":50},"economy":"x"}`, nil, 400, "FIELD_INVALID",
			[]string{"feed.flow_kg_per_h is -5", "18 % is 0.18", "Did you mean temperature_c?", `economy is \"x\"`}},
		{"no liquor", "POST", solve, `{}`, nil, 400, "FIELD_INVALID", []string{"liquor is left out", "sodium-hydroxide"}},
		{"unknown liquor", "POST", solve, `{"liquor":{"id":"caustic"}}`, nil, 400, "FIELD_INVALID", []string{"liquor.id", "sodium-hydroxide"}},
		{"two liquors", "POST", solve, `{` + good + `,"liquor":{"id":"water"}}`, nil, 400, "FIELD_INVALID", []string{"beside custom_liquor"}},
		{"solids in water", "POST", solve, `{"liquor":{"id":"water"},"feed":{"flow_kg_per_h":1000,"solids_fraction":0.1,"temperature_c":50},"product":{"solids_fraction":0.4},"steam":{"pressure_kpa_abs":200},"effect":{"pressure_kpa_abs":20,"coefficient_w_per_m2_k":2000}}`, nil, 400, "OUTSIDE_CORRELATION", []string{"solids of water"}},
		{"caustic that boils hotter than its steam", "POST", solve, `{"liquor":{"id":"sodium-hydroxide"},"feed":{"flow_kg_per_h":4535.924,"solids_fraction":0.1,"temperature_c":25},"product":{"solids_fraction":0.75},"steam":{"temperature_c":171.11},"effect":{"pressure_kpa_abs":101.325,"coefficient_w_per_m2_k":2839}}`, nil, 422, "INFEASIBLE", []string{"no driving force"}},
		{"rise table out of order", "POST", solve, `{"custom_liquor":{"rise_table":{"rows":[{"solids_fraction":0.4,"points":[{"water_boiling_temperature_c":60,"rise_k":2}]},{"solids_fraction":0.3,"points":[{"water_boiling_temperature_c":60,"rise_k":1}]}]},"specific_heat_kj_per_kg_k":4}}`, nil, 400, "FIELD_INVALID", []string{"rows[1].solids_fraction", "rising order"}},
		{"solute without a factor", "POST", solve, `{"custom_liquor":{"solute":{"molar_mass_g_per_mol":342},"specific_heat_kj_per_kg_k":4}}`, nil, 400, "FIELD_INVALID", []string{"van_t_hoff_factor is needed"}},
		{"two rises", "POST", solve, `{"custom_liquor":{"rise_k":0,"rise_polynomial":{"coefficients_k":[0]},"specific_heat_kj_per_kg_k":4}}`, nil, 400, "FIELD_INVALID", []string{"beside rise_k"}},
		{"no heat", "POST", solve, `{"custom_liquor":{"rise_k":0}}`, nil, 400, "FIELD_INVALID", []string{"specific_heat_kj_per_kg_k"}},
		{"lines out of order", "POST", solve, `{"custom_liquor":{"duhring":{"lines":[{"solids_fraction":0.5,"slope":1,"intercept_c":1},{"solids_fraction":0.4,"slope":1,"intercept_c":1}]},"specific_heat_kj_per_kg_k":4}}`, nil, 400, "FIELD_INVALID", []string{"lines[1].solids_fraction", "rising order"}},
		{"line without slope", "POST", solve, `{"custom_liquor":{"duhring":{"lines":[{"solids_fraction":0.5,"intercept_c":1}]},"specific_heat_kj_per_kg_k":4}}`, nil, 400, "FIELD_INVALID", []string{"custom_liquor.duhring.lines[0].slope is needed"}},
		{"not UTF-8", "POST", solve, "{\"custom_liquor\":{\"source\":\"\xff\"}}", nil, 400, "FIELD_INVALID", []string{"UTF-8"}},
		{"deep", "POST", solve, `{"a":` + deep + `}`, nil, 400, "FIELD_INVALID", []string{"nested too deeply", "16 levels"}},
		{"depth bomb", "POST", solve, `{"a":` + bomb + `}`, nil, 400, "FIELD_INVALID", []string{"nested too deeply"}},
		{"too large a body", "POST", solve, `{"a":"` + strings.Repeat("x", 2_000_000) + `"}`, nil, 413, "TOO_LARGE", []string{"1048576"}},
		{"too long a target", "GET", saturation + "?pressure_kpa_abs=1" + strings.Repeat("0", 9000), "", nil, 414, "TOO_LARGE", []string{"8192"}},
		{"XML", "POST", solve, `<a/>`, []string{"Content-Type", "text/xml"}, 415, "UNSUPPORTED_MEDIA_TYPE", []string{"application/json"}},
		{"compressed", "POST", solve, `x`, []string{"Content-Encoding", "gzip"}, 415, "UNSUPPORTED_MEDIA_TYPE", []string{"plain JSON"}},
		{"other character set", "POST", solve, `{}`, []string{"Content-Type", "application/json; charset=iso-8859-1"}, 415, "UNSUPPORTED_MEDIA_TYPE", []string{"UTF-8"}},
		{"query beside a body", "POST", solve + "?economy=1", `{` + good + `}`, nil, 400, "FIELD_INVALID", []string{"takes no query"}},
		{"query on a page", "GET", "/openapi.json?x=1", "", nil, 400, "FIELD_INVALID", []string{"x"}},
		{"wrong method", "DELETE", solve, "", nil, 405, "METHOD_NOT_ALLOWED", []string{"POST, GET, HEAD, OPTIONS"}},
		{"override of the method", "POST", state, "", []string{"X-HTTP-Method-Override", "GET", "Content-Type", "application/x-www-form-urlencoded"}, 405, "METHOD_NOT_ALLOWED", nil},
		{"no such path", "GET", "/v2/nothing", "", nil, 404, "NOT_FOUND", []string{"GET / lists"}},
		{"repeats the balance", "POST", solve, `{` + good + `,"evaporation_kg_per_h":750}`, nil, 400, "OVER_SPECIFIED", []string{"feed.flow_kg_per_h", "evaporation_kg_per_h"}},
		{"level without density", "POST", solve, strings.Replace(`{`+good+`}`, `"coefficient_w_per_m2_k":2000`, `"coefficient_w_per_m2_k":2000,"liquor_level_m":2`, 1), nil, 400, "FIELD_INVALID", []string{"effect.liquor_level_m", "density_kg_per_m3"}},
		{"level to find without density", "POST", solve, `{` + good + `,"find":["effect.liquor_level_m"]}`, nil, 400, "FIELD_INVALID", []string{"effect.liquor_level_m", "density_kg_per_m3"}},
		{"volume without density", "POST", solve, strings.Replace(`{`+good+`}`, `"flow_kg_per_h":1000`, `"volume_flow_m3_per_h":1`, 1), nil, 400, "FIELD_INVALID", []string{"feed.volume_flow_m3_per_h"}},
		{"two densities", "POST", solve, strings.Replace(`{`+good+`}`, `"rise_k":0`, `"rise_k":0,"density_kg_per_m3":1000,"density_polynomial":{"coefficients_kg_per_m3":[1000]}`, 1), nil, 400, "FIELD_INVALID", []string{"beside density_kg_per_m3"}},
		{"level in millimetres", "POST", solve, strings.Replace(`{`+good+`}`, `"coefficient_w_per_m2_k":2000`, `"coefficient_w_per_m2_k":2000,"liquor_level_m":2500`, 1), nil, 400, "FIELD_INVALID", []string{"at most 100 m"}},
		{"level and pump", "POST", solve, strings.Replace(strings.Replace(`{`+good+`}`, `"coefficient_w_per_m2_k":2000`, `"coefficient_w_per_m2_k":2000,"liquor_level_m":2,"circulation_kg_per_h":100000`, 1), `"rise_k":0`, `"rise_k":0,"density_kg_per_m3":1000`, 1), nil, 400, "FIELD_INVALID", []string{"effect.circulation_kg_per_h", "static head"}},
		{"mass and volume of the feed", "POST", solve, strings.Replace(strings.Replace(`{`+good+`}`, `"flow_kg_per_h":1000`, `"flow_kg_per_h":1000,"volume_flow_m3_per_h":1`, 1), `"rise_k":0`, `"rise_k":0,"density_kg_per_m3":1000`, 1), nil, 400, "OVER_SPECIFIED", []string{"feed.flow_kg_per_h", "feed.volume_flow_m3_per_h"}},
		{"sensitivity of what is no number", "POST", solve, `{` + good + `,"sensitivities_of":["effect.nothing"]}`, nil, 400, "FIELD_INVALID", []string{"sensitivities_of[0]", "effect.area_m2"}},
		{"sensitivity of what is given", "POST", solve, `{` + good + `,"sensitivities_of":["feed.flow_kg_per_h"]}`, nil, 400, "FIELD_INVALID", []string{"feed.flow_kg_per_h", "solved for"}},
		{"sensitivity twice", "POST", solve, `{` + good + `,"sensitivities_of":["effect.area_m2","effect.area_m2"]}`, nil, 400, "FIELD_INVALID", []string{"each once"}},
		{"another engine required", "POST", solve, `{` + good + `,"require_engine_version":"0.0.9"}`, nil, 412, "VERSION_MISMATCH", []string{"0.0.9", "require_engine_version"}},
		{"another engine required for steam", "GET", state + "?pressure_kpa_abs=100&temperature_c=20&require_engine_version=7", "", nil, 412, "VERSION_MISMATCH", []string{"this engine is version"}},
		{"another engine required for states", "POST", states, `{"pressure_kpa_abs":[1],"temperature_c":[1],"require_engine_version":"7"}`, nil, 412, "VERSION_MISMATCH", nil},
		{"no engine required", "GET", saturation + "?temperature_c=20&require_engine_version=", "", nil, 400, "FIELD_INVALID", []string{"require_engine_version"}},
		{"check of a bad field", "POST", "/v1/effects:check", `{` + good + `,"economy":-1}`, nil, 400, "FIELD_INVALID", []string{"economy"}},
		{"weaker product", "POST", solve, strings.Replace(`{`+good+`}`, `"solids_fraction":0.4`, `"solids_fraction":0.05`, 1), nil, 422, "INFEASIBLE", []string{"weaker", "0.05 kg/kg"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			response, body := s.ask(t, c.method, c.path, c.body, c.header...)
			if response.StatusCode != c.status {
				t.Errorf("status %d, want %d: %s", response.StatusCode, c.status, body)
			}
			if got := response.Header.Get("Content-Type"); got != "application/problem+json" {
				t.Errorf("Content-Type %q", got)
			}
			if err := valid("Problem", body); err != nil {
				t.Errorf("not as described: %v: %s", err, body)
			}
			var problem gateway.Problem
			if err := json.Unmarshal([]byte(body), &problem); err != nil || problem.Reason != c.reason {
				t.Errorf("reason %q, want %q: %s", problem.Reason, c.reason, body)
			}
			for _, word := range c.words {
				if !strings.Contains(body, word) {
					t.Errorf("%q is missing: %s", word, body)
				}
			}
			for _, leak := range []string{"strconv", "proto:", "goroutine", "runtime.", "json:", "rpc error", "unexpected token", "invalid character"} {
				if strings.Contains(body, leak) {
					t.Errorf("leaks %q: %s", leak, body)
				}
			}
			if response.StatusCode == 405 && response.Header.Get("Allow") == "" {
				t.Error("405 without Allow")
			}
		})
	}
}

// TestOnTheSaturationLine asks for a state by the pressure and temperature at
// which both phases exist.
func TestOnTheSaturationLine(t *testing.T) {
	s := start(t)
	_, pressure := s.ask(t, "GET", "/v1/steam/saturation?temperature_c=100&pick=pressure_kpa_abs", "")
	response, body := s.ask(t, "GET", "/v1/steam/state?temperature_c=100&pressure_kpa_abs="+pressure, "")
	if response.StatusCode != 400 || !strings.Contains(body, "give dryness_fraction") {
		t.Errorf("%d %s", response.StatusCode, body)
	}
}

// TestAnswersAreAsDescribed holds live answers and good requests to the
// description.
func TestAnswersAreAsDescribed(t *testing.T) {
	s := start(t)
	valid := describedBy(t)
	if err := valid("SolveEffectRequest", `{`+good+`}`); err != nil {
		t.Errorf("a good request: %v", err)
	}
	for _, density := range []string{`"density_kg_per_m3":1000`, `"density_polynomial":{"coefficients_kg_per_m3":[1000,300]}`} {
		if err := valid("SolveEffectRequest", `{"custom_liquor":{"rise_k":0,"specific_heat_kj_per_kg_k":4,`+density+`}}`); err != nil {
			t.Errorf("a liquor with density: %v", err)
		}
	}
	if err := valid("SolveEffectRequest", `{"custom_liquor":{"rise_k":0,"specific_heat_kj_per_kg_k":4,"density_kg_per_m3":1000,"density_polynomial":{"coefficients_kg_per_m3":[1]}}}`); err == nil {
		t.Error("the description accepts two densities")
	}
	if err := valid("SolveEffectRequest", `{`+good+`,"economy":-1}`); err == nil {
		t.Error("the description accepts a negative economy")
	}
	if err := valid("SolveEffectRequest", `{"custom_liquor":{"rise_k":0}}`); err == nil {
		t.Error("the description accepts a liquor without heat")
	}
	for _, c := range []struct{ schema, method, path, body string }{
		{"EffectSolution", "POST", "/v1/effects:solve", `{` + good + `}`},
		{"EffectSolution", "POST", "/v1/effects:solve", `{` + good + `,"sensitivities_of":["effect.area_m2","product.flow_kg_per_h"],"require_engine_version":"` + engine.Version + `"}`},
		{"EffectCheck", "POST", "/v1/effects:check", `{` + good + `}`},
		{"EffectCheck", "POST", "/v1/effects:check", `{` + good + `,"evaporation_kg_per_h":750}`},
		{"EffectCheck", "GET", "/v1/effects:check?custom_liquor.rise_k=0&custom_liquor.specific_heat_kj_per_kg_k=4", ""},
		{"SteamState", "GET", "/v1/steam/state?pressure_kpa_abs=100&temperature_c=20", ""},
		{"SteamState", "GET", "/v1/steam/state?pressure_kpa_abs=100&dryness_fraction=0.5", ""},
		{"SteamState", "GET", "/v1/steam/state?enthalpy_kj_per_kg=2087.6&entropy_kj_per_kg_k=4.412", ""},
		{"SteamStates", "POST", "/v1/steam/states:compute", `{"pressure_kpa_abs":[100,-1,22064],"enthalpy_kj_per_kg":[2000,3000,2087.5]}`},
		{"Saturation", "GET", "/v1/steam/saturation?temperature_c=60", ""},
		{"Saturation", "GET", "/v1/steam/saturation?temperature_c=373.946", ""},
		{"Engine", "GET", "/v1/engine", ""},
		{"Verification", "GET", "/v1/engine/verification", ""},
	} {
		response, body := s.ask(t, c.method, c.path, c.body)
		if response.StatusCode != 200 {
			t.Errorf("%s: %d %s", c.path, response.StatusCode, body)
		}
		if err := valid(c.schema, body); err != nil {
			t.Errorf("%s is not as described: %v: %s", c.path, err, body)
		}
	}
	raw, err := os.ReadFile("gateway/openapi.json")
	if err != nil {
		t.Fatal(err)
	}
	if _, body := s.ask(t, "GET", "/openapi.json", ""); body != string(raw) {
		t.Error("GET /openapi.json differs from the file")
	}
}

func TestPickForSpreadsheets(t *testing.T) {
	s := start(t)
	const saturation = "/v1/steam/saturation?pressure_kpa_abs=101.325"
	_, whole := s.ask(t, "GET", saturation, "")
	var answer map[string]json.RawMessage
	if err := json.Unmarshal([]byte(whole), &answer); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		path   string
		status int
		want   string // exact, or a beginning if it ends in *
	}{
		{saturation + "&pick=latent_heat_kj_per_kg", 200, string(answer["latent_heat_kj_per_kg"])},
		{saturation + "&pick=vapour.phase", 200, "PHASE_SATURATED_VAPOUR"},
		{saturation + "&pick=provenance.models[0].id", 200, "iapws-r7-97"},
		{saturation + "&pick=latent_heat", 400, "ERROR FIELD_INVALID: *"},
		{saturation + "&pick=vapour", 400, "ERROR FIELD_INVALID: *"},
		{saturation + "&pick=vapour.phase.x", 400, "ERROR FIELD_INVALID: *"},
		{saturation + "&pick=advisories", 400, "ERROR FIELD_INVALID: *"},
		{saturation + "&pick=a..b", 400, "ERROR FIELD_INVALID: *"},
		{saturation + "&pick=advisories[0].message", 404, "ERROR NOT_FOUND: *"},
		{"/v1/steam/state?pressure_kpa_abs=20&dryness_fraction=0.5&pick=specific_heat_cp_kj_per_kg_k", 404, "ERROR NOT_FOUND: *"},
		{"/v1/steam/saturation?pressure_kpa_abs=-1&pick=temperature_c", 400, "ERROR FIELD_INVALID: *"},
		{"/v1/steam/saturation?pressure_kpa_abs=-1&pick=temperature_c&errors=inline", 200, "ERROR FIELD_INVALID: *"},
		{"/v1/steam/saturation?pressure_kpa_abs=1,5&pick=temperature_c&errors=inline", 200, "ERROR FIELD_INVALID: *"},
		{"/v1/steam/saturation?temperature_c=400&pick=temperature_c&errors=inline", 200, "ERROR OUTSIDE_CORRELATION: *"},
	} {
		response, body := s.ask(t, "GET", c.path, "")
		begin, open := strings.CutSuffix(c.want, "*")
		if response.StatusCode != c.status || !open && body != c.want || open && !strings.HasPrefix(body, begin) || strings.Contains(body, "\n") {
			t.Errorf("%s: %d %q, want %d %q on one line", c.path, response.StatusCode, body, c.status, c.want)
		}
		if got := response.Header.Get("Content-Type"); got != "text/plain; charset=utf-8" {
			t.Errorf("%s: Content-Type %q", c.path, got)
		}
	}
}

func TestCachingHeadAndOptions(t *testing.T) {
	s := start(t)
	const path = "/v1/steam/saturation?temperature_c=60"
	first, body := s.ask(t, "GET", path, "")
	tag := first.Header.Get("Etag")
	if tag == "" || first.Header.Get("Cache-Control") != "no-cache" {
		t.Fatalf("headers %v", first.Header)
	}
	for _, have := range []string{tag, `"other", W/` + tag} {
		again, empty := s.ask(t, "GET", path, "", "If-None-Match", have)
		if again.StatusCode != http.StatusNotModified || empty != "" || again.Header.Get("Etag") != tag {
			t.Errorf("If-None-Match %s: %d %q", have, again.StatusCode, empty)
		}
	}
	if changed, _ := s.ask(t, "GET", path, "", "If-None-Match", `"other"`); changed.StatusCode != 200 {
		t.Errorf("another tag: %d", changed.StatusCode)
	}
	head, empty := s.ask(t, "HEAD", path, "")
	if head.StatusCode != 200 || empty != "" || head.Header.Get("Etag") != tag || head.Header.Get("Content-Length") != fmt.Sprint(len(body)) {
		t.Errorf("HEAD: %d %q %v", head.StatusCode, empty, head.Header)
	}
	options, _ := s.ask(t, "OPTIONS", "/v1/effects:solve", "")
	if options.StatusCode != 204 || options.Header.Get("Allow") != "POST, GET, HEAD, OPTIONS" {
		t.Errorf("OPTIONS: %d %v", options.StatusCode, options.Header)
	}
	refused, _ := s.ask(t, "GET", "/v1/steam/saturation", "")
	if refused.Header.Get("Etag") != "" || refused.Header.Get("Cache-Control") != "no-store" {
		t.Errorf("a refusal may be kept: %v", refused.Header)
	}
	// Some clients escape the colon.
	if escaped, body := s.ask(t, "POST", "/v1/effects%3Asolve", `{`+good+`}`); escaped.StatusCode != 200 {
		t.Errorf("escaped colon: %d %s", escaped.StatusCode, body)
	}
	for _, page := range []string{"/", "/healthz", "/readyz"} {
		response, body := s.ask(t, "GET", page, "")
		kept := response.Header.Get("Etag") != ""
		if response.StatusCode != 200 || body == "" || kept != (page == "/") || kept == (response.Header.Get("Cache-Control") == "no-store") {
			t.Errorf("%s: %d %q %v", page, response.StatusCode, body, response.Header)
		}
	}
}
