package statuses

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"

	validate "buf.build/gen/go/bufbuild/protovalidate/protocolbuffers/go/buf/validate"
	"buf.build/go/protovalidate"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/convert"
)

// FromValidation words the violations of the protos' own rules in a message of
// type d. ok is false if err is something else, such as a rule that does not
// compile.
func FromValidation(err error, d protoreflect.MessageDescriptor) (violations []*calandriav1.Violation, ok bool) {
	var invalid *protovalidate.ValidationError
	if !errors.As(err, &invalid) {
		return nil, false
	}
	seen := map[string]bool{}
	for _, v := range invalid.Violations {
		field := protovalidate.FieldPathString(v.Proto.GetField())
		if seen[field] {
			continue
		}
		seen[field] = true
		violations = append(violations, wordViolation(field, v, d))
	}
	return violations, true
}

func wordViolation(field string, v *protovalidate.Violation, d protoreflect.MessageDescriptor) *calandriav1.Violation {
	elements := v.Proto.GetField().GetElements()
	var at protoreflect.FieldDescriptor
	for i, element := range elements {
		at = d.Fields().ByNumber(protoreflect.FieldNumber(element.GetFieldNumber()))
		if at == nil { // a oneof has no number
			return missingChoice(field, d.Oneofs().ByName(protoreflect.Name(element.GetFieldName())))
		}
		if i < len(elements)-1 && at.Message() != nil {
			d = at.Message()
		}
	}
	if at == nil || v.Proto.GetRuleId() == "required" {
		return &calandriav1.Violation{
			Field: field, Value: "left out", Limit: "needed",
			Detail: fmt.Sprintf("%s is needed; give it.", field),
		}
	}
	limit := Limit(at)
	wayOut := hint(field, v.FieldValue)
	if elements[len(elements)-1].GetSubscript() != nil {
		limit = limitOfItem(at)
		wayOut += meant(at, v.FieldValue)
	}
	value := shown(v.FieldValue)
	if twice := namedTwice(v.FieldValue); v.Proto.GetRuleId() == "repeated.unique" && twice != "" {
		wayOut += " " + twice + " stands there twice; drop one."
	}
	return &calandriav1.Violation{
		Field: field, Value: value, Limit: limit,
		Detail: fmt.Sprintf("%s is %s; it must be %s.%s", field, value, limit, wayOut),
	}
}

// missingChoice words a oneof of which no member is given.
func missingChoice(field string, o protoreflect.OneofDescriptor) *calandriav1.Violation {
	var members []string
	for i := 0; o != nil && i < o.Fields().Len(); i++ {
		members = append(members, string(o.Fields().Get(i).Name()))
	}
	limit := "exactly one of " + strings.Join(members, ", ")
	return &calandriav1.Violation{
		Field: field, Value: "left out", Limit: limit, Detail: fmt.Sprintf("%s: give %s.", field, limit),
	}
}

func shown(v protoreflect.Value) string {
	switch value := v.Interface().(type) {
	case float64:
		return strconv.FormatFloat(value, 'g', -1, 64)
	case string:
		if len(value) > 40 {
			return fmt.Sprintf("a text of %d characters", len([]rune(value)))
		}
		return strconv.Quote(value)
	case protoreflect.List:
		return fmt.Sprintf("%d items", value.Len())
	}
	return "given"
}

// hint guesses at a unit that was mixed up.
func hint(field string, v protoreflect.Value) string {
	value, ok := v.Interface().(float64)
	if !ok {
		return ""
	}
	if strings.Contains(field, "fraction") && value > 1 && value <= 100 {
		return fmt.Sprintf(" It looks like a percentage: %g %% is %g.", value, value/100)
	}
	if strings.HasSuffix(field, "_kpa_abs") && value <= 0 {
		return " It looks like a gauge pressure: add the barometric pressure."
	}
	return ""
}

// meant guesses at the name that an item of a list of names was meant to be.
func meant(d protoreflect.FieldDescriptor, v protoreflect.Value) string {
	name, ok := v.Interface().(string)
	if !ok {
		return ""
	}
	names := Near(rulesOf(d).GetRepeated().GetItems().GetString().GetIn(), name)
	if len(names) == 0 {
		return ""
	}
	return " Did you mean " + names[0] + "?"
}

// namedTwice returns the first text of a list that stands there before; "" if
// none does.
func namedTwice(v protoreflect.Value) string {
	list, ok := v.Interface().(protoreflect.List)
	if !ok {
		return ""
	}
	seen := map[string]bool{}
	for i := range list.Len() {
		text := list.Get(i).String()
		if seen[text] {
			return shown(list.Get(i))
		}
		seen[text] = true
	}
	return ""
}

// rulesOf reads the rules of a field; none if it has none.
func rulesOf(d protoreflect.FieldDescriptor) *validate.FieldRules {
	rules, ok := proto.GetExtension(d.Options(), validate.E_Field).(*validate.FieldRules)
	if !ok {
		return nil
	}
	return rules
}

// Limit words all rules of a field as one phrase with its unit.
func Limit(d protoreflect.FieldDescriptor) string {
	rules := rulesOf(d)
	if rules == nil {
		return "valid"
	}
	if repeated := rules.GetRepeated(); repeated != nil {
		var parts []string
		if repeated.HasMinItems() {
			parts = append(parts, fmt.Sprintf("at least %s", items(repeated.GetMinItems())))
		}
		if repeated.HasMaxItems() {
			parts = append(parts, fmt.Sprintf("at most %s", items(repeated.GetMaxItems())))
		}
		if repeated.GetUnique() {
			parts = append(parts, "each once")
		}
		if in := repeated.GetItems().GetString().GetIn(); len(in) > 0 {
			parts = append(parts, "of "+strings.Join(in, ", "))
		}
		if number := repeated.GetItems().GetDouble(); number != nil {
			parts = append(parts, "each "+limitOfNumber(number, ""))
		}
		return strings.Join(parts, ", ")
	}
	if text := rules.GetString(); text != nil {
		return fmt.Sprintf("a text of at most %d characters", text.GetMaxLen())
	}
	if number := rules.GetDouble(); number != nil {
		return limitOfNumber(number, convert.Unit(string(d.Name())))
	}
	return "given"
}

func items(n uint64) string {
	if n == 1 {
		return "1 item"
	}
	return strconv.FormatUint(n, 10) + " items"
}

// limitOfItem words the rules of one item of a list.
func limitOfItem(d protoreflect.FieldDescriptor) string {
	item := rulesOf(d).GetRepeated().GetItems()
	if in := item.GetString().GetIn(); len(in) > 0 {
		return "one of " + strings.Join(in, ", ")
	}
	if number := item.GetDouble(); number != nil {
		return limitOfNumber(number, convert.Unit(string(d.Name())))
	}
	return "valid"
}

func limitOfNumber(r *validate.DoubleRules, unit string) string {
	var parts []string
	switch {
	case r.HasGt():
		parts = append(parts, "above "+plain(r.GetGt()))
	case r.HasGte():
		parts = append(parts, "at least "+plain(r.GetGte()))
	}
	switch {
	case r.HasLt():
		parts = append(parts, "below "+plain(r.GetLt()))
	case r.HasLte():
		parts = append(parts, "at most "+plain(r.GetLte()))
	}
	phrase := strings.Join(parts, " and ")
	if unit != "" {
		phrase += " " + unit
	}
	return phrase
}

func plain(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }

// Bounds reads the rules of the numbers of a message, as one test for each
// field: whether a value keeps all of them.
func Bounds(d protoreflect.MessageDescriptor) map[string]func(v float64) bool {
	bounds := map[string]func(v float64) bool{}
	for i := range d.Fields().Len() {
		field := d.Fields().Get(i)
		r := rulesOf(field).GetDouble()
		if r == nil {
			continue
		}
		bounds[string(field.Name())] = func(v float64) bool {
			return !math.IsNaN(v) && !math.IsInf(v, 0) &&
				(!r.HasGt() || v > r.GetGt()) && (!r.HasGte() || v >= r.GetGte()) &&
				(!r.HasLt() || v < r.GetLt()) && (!r.HasLte() || v <= r.GetLte())
		}
	}
	return bounds
}
