package gateway

import (
	"bytes"
	"encoding/json"
	"regexp"
	"strconv"
	"strings"

	"google.golang.org/protobuf/reflect/protoreflect"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// step is one step of a pick: into a field, and if index >= 0 to an item.
type step struct {
	name  string
	index int
}

var stepForm = regexp.MustCompile(`^([A-Za-z0-9_]+)(?:\[([0-9]{1,6})\])?$`)

// checkPick reads a pick against the message of an answer, before anything is
// computed.
func checkPick(pick string, d protoreflect.MessageDescriptor) (steps []step, violation *calandriav1.Violation) {
	var c check
	complain := func(value, limit, wayOut string) ([]step, *calandriav1.Violation) {
		c.add(pickParameter, value, limit, wayOut)
		return nil, c.violations[0]
	}
	parts := strings.Split(pick, ".")
	for i, part := range parts {
		form := stepForm.FindStringSubmatch(part)
		if form == nil {
			return complain(strconv.Quote(clip(pick)), "names joined by dots, items as [0]", "Write a path such as effect.area_m2.")
		}
		field := d.Fields().ByName(protoreflect.Name(form[1]))
		if field == nil {
			names := near(d, form[1])
			if len(names) == 0 {
				names = namesOf(d)
			}
			return complain(strconv.Quote(clip(pick)), "a path of the answer", "No "+clip(form[1])+" there; there are "+strings.Join(names, ", ")+".")
		}
		index := -1
		if form[2] != "" {
			// At most six digits: it fits.
			index, _ = strconv.Atoi(form[2])
		}
		if field.IsList() != (index >= 0) {
			if field.IsList() {
				return complain(strconv.Quote(clip(pick)), "one item of the list", "Write "+form[1]+"[0] for its first item.")
			}
			return complain(strconv.Quote(clip(pick)), "a name without index", form[1]+" is not a list.")
		}
		steps = append(steps, step{form[1], index})
		last := i == len(parts)-1
		switch {
		case field.Kind() == protoreflect.MessageKind && last:
			return complain(strconv.Quote(clip(pick)), "one value", "It is a group; pick one of "+strings.Join(namesOf(field.Message()), ", ")+".")
		case field.Kind() == protoreflect.MessageKind:
			d = field.Message()
		case !last:
			return complain(strconv.Quote(clip(pick)), "one value", "Nothing stands below "+form[1]+".")
		}
	}
	return steps, nil
}

// take reads the value that steps lead to, exactly as the JSON writes it;
// there is none if the answer lacks it.
func take(answer []byte, steps []step) (text string, ok bool) {
	value := json.RawMessage(answer)
	for _, s := range steps {
		var object map[string]json.RawMessage
		if json.Unmarshal(value, &object) != nil {
			return "", false
		}
		if value, ok = object[s.name]; !ok {
			return "", false
		}
		if s.index >= 0 {
			var list []json.RawMessage
			if json.Unmarshal(value, &list) != nil || s.index >= len(list) {
				return "", false
			}
			value = list[s.index]
		}
	}
	value = bytes.TrimSpace(value)
	if len(value) > 0 && value[0] == '"' {
		if json.Unmarshal(value, &text) != nil {
			return "", false
		}
		return text, true
	}
	return string(value), true
}
