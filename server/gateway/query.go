package gateway

import (
	"net/url"
	"slices"
	"strings"
	"unicode/utf8"

	"google.golang.org/protobuf/reflect/protoreflect"
	"google.golang.org/protobuf/types/dynamicpb"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// Parameters of the REST face itself, beside those of a request.
const (
	pickParameter   = "pick"
	errorsParameter = "errors"
	errorsInline    = "inline"
)

// options are the parameters of the REST face.
type options struct {
	pick   string
	inline bool
}

// optionsOf reads what can be read of the parameters of the REST face, which
// say how to answer even if something is wrong with the query.
func optionsOf(values url.Values) options {
	modes := values[errorsParameter]
	pick := values.Get(pickParameter)
	return options{pick: pick, inline: pick != "" && len(modes) == 1 && modes[0] == errorsInline}
}

// checkQuery reads a query strictly against a message and returns all that is
// wrong with it. rest is the query without the parameters of the REST face.
func checkQuery(raw string, d protoreflect.MessageDescriptor) (rest string, violations []*calandriav1.Violation) {
	var c check
	values, err := url.ParseQuery(raw)
	if err != nil {
		c.add("", "a query that can not be read", "name=value pairs joined by &", "Encode special characters as %XX; do not separate by semicolons.")
	}
	picks, modes := values[pickParameter], values[errorsParameter]
	switch {
	case len(picks) > 1:
		c.add(pickParameter, "given twice", "once", "Pick one value a call.")
	case len(picks) == 1 && picks[0] == "":
		c.add(pickParameter, "empty", "the path of one value", "Name a value of the answer, such as latent_heat_kj_per_kg.")
	}
	if len(modes) > 0 {
		if len(modes) > 1 || modes[0] != errorsInline {
			c.add(errorsParameter, clip(strings.Join(modes, ", ")), errorsInline, "Leave it out, or give errors=inline.")
		} else if len(picks) == 0 {
			c.add(errorsParameter, errorsInline, "only beside pick", "Give pick too, or drop it.")
		}
	}
	values.Del(pickParameter)
	values.Del(errorsParameter)
	keys := make([]string, 0, len(values))
	for key := range values {
		keys = append(keys, key)
	}
	slices.Sort(keys)
	m := dynamicpb.NewMessage(d)
	for _, key := range keys {
		c.parameter(m, key, values[key])
	}
	c.rules(m)
	return values.Encode(), c.violations
}

// parameter puts one parameter into m, or complains.
func (c *check) parameter(m *dynamicpb.Message, key string, values []string) {
	path := ""
	names := strings.Split(key, ".")
	for i, name := range names {
		field := c.field(m.Descriptor(), path, name)
		if field == nil {
			return
		}
		path = join(path, name)
		if field.Kind() == protoreflect.MessageKind {
			switch {
			case field.IsList():
				c.add(path, "a list of groups", "a request by POST", "Send tables as JSON by POST.")
				return
			case i == len(names)-1:
				c.add(path, "a group", "one of its fields", "Name one of "+strings.Join(namesOf(field.Message()), ", ")+", such as "+path+"."+namesOf(field.Message())[0]+".")
				return
			}
			if !m.Has(field) {
				c.oneof(m, field, strings.Join(names[:i], "."))
			}
			inner, ok := m.Mutable(field).Message().Interface().(*dynamicpb.Message)
			if !ok {
				return
			}
			m = inner
			continue
		}
		if i != len(names)-1 {
			c.add(join(path, clip(names[i+1])), "an unknown name", path+" itself", "Nothing stands below "+path+".")
			return
		}
		c.oneof(m, field, strings.Join(names[:i], "."))
		if len(values) > 1 && !field.IsList() {
			c.add(path, "given twice", "once", "Drop one of the two.")
			return
		}
		for _, value := range values {
			var v protoreflect.Value
			if field.Kind() == protoreflect.DoubleKind {
				number, ok := c.number(field, path, value)
				if !ok {
					continue
				}
				v = protoreflect.ValueOfFloat64(number)
			} else {
				if !utf8.ValidString(value) {
					c.add(path, "not UTF-8 text", "text in UTF-8", "Encode its UTF-8 bytes as %XX.")
					continue
				}
				v = protoreflect.ValueOfString(value)
			}
			if field.IsList() {
				m.Mutable(field).List().Append(v)
			} else {
				m.Set(field, v)
			}
		}
	}
}
