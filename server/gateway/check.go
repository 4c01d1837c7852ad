package gateway

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"

	"buf.build/go/protovalidate"
	"google.golang.org/protobuf/reflect/protoreflect"
	"google.golang.org/protobuf/types/dynamicpb"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/convert"
	"calandria.example/calandria/server/statuses"
)

// violationsMax bounds how many violations one answer lists.
const violationsMax = 100

// check collects everything that is wrong with a request, and builds the
// message from what is right, so that the protos' own rules can be applied to
// that in the same go.
type check struct {
	violations []*calandriav1.Violation
	faulty     map[string]bool // paths that have a violation
	chosen     map[string]bool // oneofs of which a member is given, right or wrong
	unread     map[string]bool // items of lists that could not be read and stand there empty
}

func (c *check) add(field, value, limit, wayOut string) {
	if c.full() {
		return
	}
	if c.faulty == nil {
		c.faulty = map[string]bool{}
	}
	c.faulty[field] = true
	subject := field
	if subject == "" {
		subject = "The request"
	}
	detail := fmt.Sprintf("%s is %s; accepted: %s. %s", subject, value, limit, wayOut)
	c.violations = append(c.violations, &calandriav1.Violation{Field: field, Value: value, Limit: limit, Detail: strings.TrimSpace(detail)})
}

// full tells whether an answer has room for no more violations.
func (c *check) full() bool { return len(c.violations) >= violationsMax }

// rules applies the protos' rules to what could be read, beside what could
// not.
func (c *check) rules(m *dynamicpb.Message) {
	if len(c.violations) == 0 || c.full() {
		return // the call itself will apply them
	}
	err := protovalidate.Validate(m)
	if err == nil {
		return
	}
	more, ok := statuses.FromValidation(err, m.Descriptor())
	if !ok {
		return
	}
	for _, v := range more {
		if !c.known(v.GetField()) && !c.full() {
			c.violations = append(c.violations, v)
		}
	}
}

// known tells whether a complaint about path would repeat one that is made: a
// value that could not be read leaves a gap, to which rules object too.
func (c *check) known(path string) bool {
	if c.faulty[path] || c.chosen[path] {
		return true
	}
	for i := range path {
		if path[i] == ']' && c.unread[path[:i+1]] {
			return true
		}
	}
	return false
}

// field finds a field by its name in the proto.
func (c *check) field(d protoreflect.MessageDescriptor, path, name string) protoreflect.FieldDescriptor {
	if f := d.Fields().ByName(protoreflect.Name(name)); f != nil {
		return f
	}
	if c.full() {
		return nil // nobody would read a hint
	}
	full := join(path, clip(name))
	if f := d.Fields().ByJSONName(name); f != nil {
		c.add(full, "an unknown name", string(f.Name()), "Write the name with underscores: "+string(f.Name())+".")
		return nil
	}
	limit, wayOut := "the names of the API", "Check the spelling, and the unit at the end of the name."
	if names := near(d, name); len(names) > 0 {
		limit, wayOut = strings.Join(names, ", "), "Did you mean "+names[0]+"?"
	} else if path != "" || d.Fields().Len() > 0 {
		limit = strings.Join(namesOf(d), ", ")
		if limit == "" {
			limit = "no fields"
		}
	}
	c.add(full, "an unknown name", limit, wayOut)
	return nil
}

// oneof notes that f is given and complains if another member already was.
func (c *check) oneof(m *dynamicpb.Message, f protoreflect.FieldDescriptor, path string) {
	group := f.ContainingOneof()
	if group == nil || group.IsSynthetic() {
		return
	}
	if c.chosen == nil {
		c.chosen = map[string]bool{}
	}
	c.chosen[join(path, string(group.Name()))] = true
	if other := m.WhichOneof(group); other != nil && other != f {
		c.add(join(path, string(f.Name())), "given beside "+string(other.Name()), "one of the two", "Drop one of them.")
	}
}

var decimal = regexp.MustCompile(`^[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)?$`)
var decimalComma = regexp.MustCompile(`^[+-]?[0-9]+,[0-9]+$`)

// number reads text as a number for field f, or complains.
func (c *check) number(f protoreflect.FieldDescriptor, path, text string) (float64, bool) {
	in := ""
	if unit := convert.Unit(string(f.Name())); unit != "" {
		in = " in " + unit
	}
	limit := "a plain number" + in
	switch lower := strings.ToLower(strings.TrimLeft(text, "+-")); {
	case decimalComma.MatchString(text):
		c.add(path, strconv.Quote(text), limit, "It looks like a decimal comma: write "+strings.Replace(text, ",", ".", 1)+".")
		return 0, false
	case lower == "nan" || lower == "inf" || lower == "infinity":
		c.add(path, strconv.Quote(clip(text)), "a finite number"+in, "Leave the field out if the value is not known.")
		return 0, false
	case text == "":
		c.add(path, "empty", limit, "Give a number, or leave the field out.")
		return 0, false
	case !decimal.MatchString(text):
		wayOut := "Give digits with a decimal point; the unit stands in the field's name."
		c.add(path, strconv.Quote(clip(text)), limit, wayOut)
		return 0, false
	}
	v, err := strconv.ParseFloat(text, 64)
	if err != nil || math.IsInf(v, 0) {
		c.add(path, clip(text), limit, "The number is too large to be meant.")
		return 0, false
	}
	return v, true
}

func join(path, name string) string {
	if path == "" {
		return name
	}
	return path + "." + name
}

// clip keeps what a caller sent from filling the answer, and from breaking it:
// statuses carry valid UTF-8 only.
func clip(s string) string {
	const longest = 60
	s = strings.ToValidUTF8(s, "\uFFFD")
	r := []rune(s)
	if len(r) > longest {
		return string(r[:longest]) + "..."
	}
	return s
}

func namesOf(d protoreflect.MessageDescriptor) []string {
	var names []string
	for i := range d.Fields().Len() {
		names = append(names, string(d.Fields().Get(i).Name()))
	}
	return names
}

// near returns up to three names of d that look like name, best first.
func near(d protoreflect.MessageDescriptor, name string) []string {
	return statuses.Near(namesOf(d), name)
}
