// Command openapi writes the description of the REST face for programs:
// OpenAPI 3.1, from the protos, their comments and their validation rules.
package main

import (
	"bytes"
	"context"
	"encoding/json"
	"flag"
	"fmt"
	"os"
	"slices"
	"strings"

	validate "buf.build/gen/go/bufbuild/protovalidate/protocolbuffers/go/buf/validate"
	"github.com/bufbuild/protocompile"
	"google.golang.org/genproto/googleapis/api/annotations"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"
	"google.golang.org/protobuf/types/descriptorpb"

	"calandria.example/calandria/engine"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/statuses"
)

func main() {
	root := flag.String("root", ".", "root of the project")
	out := flag.String("out", "server/gateway/openapi.json", "file to write")
	flag.Parse()
	text, err := describe(*root)
	if err == nil {
		err = os.WriteFile(*out, text, 0o644)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "openapi:", err)
		os.Exit(1)
	}
}

type object = map[string]any

// writer collects the description.
type writer struct {
	paths   object
	schemas object
	inside  map[protoreflect.FullName]bool // messages that stand in requests
}

// describe reads the protos below root and returns the description.
func describe(root string) ([]byte, error) {
	compiler := protocompile.Compiler{
		Resolver: protocompile.WithStandardImports(&protocompile.SourceResolver{
			ImportPaths: []string{root + "/proto", root + "/proto/vendored"},
		}),
		SourceInfoMode: protocompile.SourceInfoStandard,
	}
	files, err := compiler.Compile(context.Background(),
		"calandria/v1/steam.proto", "calandria/v1/train.proto", "calandria/v1/engine.proto")
	if err != nil {
		return nil, err
	}
	w := &writer{paths: object{}, schemas: object{}, inside: map[protoreflect.FullName]bool{}}
	for _, file := range files {
		for i := range file.Services().Len() {
			methods := file.Services().Get(i).Methods()
			for j := range methods.Len() {
				w.noteRequest(methods.Get(j).Input())
			}
		}
	}
	for _, file := range files {
		for i := range file.Services().Len() {
			service := file.Services().Get(i)
			for j := range service.Methods().Len() {
				if err := w.method(service, service.Methods().Get(j)); err != nil {
					return nil, err
				}
			}
		}
	}
	w.schemas["Problem"] = problemSchema()
	var b bytes.Buffer
	encoder := json.NewEncoder(&b)
	encoder.SetEscapeHTML(false)
	encoder.SetIndent("", " ")
	err = encoder.Encode(object{
		"openapi": "3.1.0",
		"info": object{
			"title": "Calandria", "version": engine.Version,
			"summary":     "Evaporator calculations: steam, liquors, effects",
			"description": "Whatever number a request leaves out is solved for. Every field carries its unit in its name; pressures are absolute. Unknown names are refused.",
			"license":     object{"name": "Apache-2.0", "identifier": "Apache-2.0"},
		},
		"servers":    []object{{"url": "/"}},
		"paths":      w.paths,
		"components": object{"schemas": w.schemas, "responses": object{"Problem": object{"description": "A refusal: what is wrong, with every violation, and the way out.", "content": object{"application/problem+json": object{"schema": ref("Problem")}}}}},
	})
	return b.Bytes(), err
}

// options reads an extension of descriptor options that were compiled from
// source, where extensions are not of the generated Go types.
func options[T proto.Message](raw, into proto.Message, extension protoreflect.ExtensionType) (value T, ok bool) {
	text, err := proto.Marshal(raw)
	if err != nil || proto.Unmarshal(text, into) != nil || !proto.HasExtension(into, extension) {
		return value, false
	}
	value, ok = proto.GetExtension(into, extension).(T)
	return value, ok
}

func rulesOf(f protoreflect.FieldDescriptor) *validate.FieldRules {
	rules, ok := options[*validate.FieldRules](f.Options(), &descriptorpb.FieldOptions{}, validate.E_Field)
	if !ok {
		return &validate.FieldRules{}
	}
	return rules
}

func (w *writer) noteRequest(m protoreflect.MessageDescriptor) {
	if w.inside[m.FullName()] {
		return
	}
	w.inside[m.FullName()] = true
	for i := range m.Fields().Len() {
		if f := m.Fields().Get(i); f.Message() != nil {
			w.noteRequest(f.Message())
		}
	}
}

func (w *writer) method(service protoreflect.ServiceDescriptor, m protoreflect.MethodDescriptor) error {
	rule, ok := options[*annotations.HttpRule](m.Options(), &descriptorpb.MethodOptions{}, annotations.E_Http)
	if !ok {
		return fmt.Errorf("%s has no REST path", m.FullName())
	}
	w.message(m.Output())
	for _, r := range append([]*annotations.HttpRule{rule}, rule.GetAdditionalBindings()...) {
		summary, description := comment(m)
		operation := object{
			"operationId": string(m.Name()), "tags": []string{string(service.Name())},
			"summary": summary, "description": description,
		}
		answers := object{"application/json": object{"schema": ref(string(m.Output().Name()))}}
		responses := object{"200": object{"description": "The answer.", "content": answers}}
		for _, status := range []string{"400", "404", "405", "412", "422", "500", "503", "504"} {
			responses[status] = object{"$ref": "#/components/responses/Problem"}
		}
		operation["responses"] = responses
		verb, path := "get", r.GetGet()
		if path == "" {
			verb, path = "post", r.GetPost()
			w.message(m.Input())
			operation["requestBody"] = object{"required": true, "content": object{"application/json": object{"schema": ref(string(m.Input().Name()))}}}
			responses["413"] = object{"$ref": "#/components/responses/Problem"}
			responses["415"] = object{"$ref": "#/components/responses/Problem"}
		} else {
			if len(rule.GetAdditionalBindings()) > 0 {
				operation["operationId"] = string(m.Name()) + "ByGet"
			}
			answers["text/plain"] = object{"schema": object{"type": "string", "description": "With pick: the one value; with errors=inline also a line that starts with ERROR."}}
			responses["304"] = object{"description": "The caller has this answer already (If-None-Match)."}
			responses["414"] = object{"$ref": "#/components/responses/Problem"}
			operation["parameters"] = append(w.parameters("", m.Input()),
				object{"name": "pick", "in": "query", "description": "Path of one value of the answer; the answer is then that value as plain text.", "schema": object{"type": "string"}},
				object{"name": "errors", "in": "query", "description": "With pick: answer errors with status 200, as a line that starts with ERROR.", "schema": object{"type": "string", "enum": []string{"inline"}}})
		}
		item, _ := w.paths[path].(object)
		if item == nil {
			item = object{}
			w.paths[path] = item
		}
		item[verb] = operation
	}
	return nil
}

// parameters lists what a GET takes: every number and text, by its path.
// Lists of groups are for POST only.
func (w *writer) parameters(prefix string, m protoreflect.MessageDescriptor) []object {
	var list []object
	for i := range m.Fields().Len() {
		f := m.Fields().Get(i)
		name := prefix + string(f.Name())
		switch {
		case f.Message() != nil && f.IsList():
		case f.Message() != nil:
			list = append(list, w.parameters(name+".", f.Message())...)
		default:
			schema := w.field(f)
			description, _ := schema["description"].(string)
			delete(schema, "description")
			list = append(list, object{"name": name, "in": "query", "description": description, "schema": schema})
		}
	}
	return list
}

func (w *writer) message(m protoreflect.MessageDescriptor) {
	name := string(m.Name())
	if w.schemas[name] != nil {
		return
	}
	properties, required, choices := object{}, []string{}, []object{}
	_, description := comment(m)
	schema := object{"type": "object", "description": description, "properties": properties}
	w.schemas[name] = schema
	for i := range m.Fields().Len() {
		f := m.Fields().Get(i)
		properties[string(f.Name())] = w.field(f)
		always := !w.inside[m.FullName()] && !f.HasPresence()
		if always || rulesOf(f).GetRequired() {
			required = append(required, string(f.Name()))
		}
	}
	for i := range m.Oneofs().Len() {
		o := m.Oneofs().Get(i)
		if o.IsSynthetic() {
			continue
		}
		var one []object
		for j := range o.Fields().Len() {
			one = append(one, object{"required": []string{string(o.Fields().Get(j).Name())}})
		}
		if rules, ok := options[*validate.OneofRules](o.Options(), &descriptorpb.OneofOptions{}, validate.E_Oneof); !ok || !rules.GetRequired() {
			one = append(one, object{"not": object{"anyOf": slices.Clone(one)}}) // or none of them
		}
		choices = append(choices, object{"oneOf": one})
	}
	if len(required) > 0 {
		schema["required"] = required
	}
	if len(choices) > 0 {
		schema["allOf"] = choices
	}
	if w.inside[m.FullName()] {
		schema["additionalProperties"] = false
	}
}

func (w *writer) field(f protoreflect.FieldDescriptor) object {
	_, description := comment(f)
	rules := rulesOf(f)
	if f.IsList() {
		item := w.value(f, rules.GetRepeated().GetItems())
		schema := object{"type": "array", "items": item, "description": description}
		if r := rules.GetRepeated(); r != nil {
			if r.HasMinItems() {
				schema["minItems"] = r.GetMinItems()
			}
			if r.HasMaxItems() {
				schema["maxItems"] = r.GetMaxItems()
			}
			if r.GetUnique() {
				schema["uniqueItems"] = true
			}
		}
		return schema
	}
	schema := w.value(f, rules)
	schema["description"] = description
	return schema
}

func (w *writer) value(f protoreflect.FieldDescriptor, rules *validate.FieldRules) object {
	switch f.Kind() {
	case protoreflect.MessageKind:
		w.message(f.Message())
		return ref(string(f.Message().Name()))
	case protoreflect.DoubleKind:
		schema := object{"type": "number", "format": "double"}
		r := rules.GetDouble()
		if r.HasGt() {
			schema["exclusiveMinimum"] = r.GetGt()
		}
		if r.HasGte() {
			schema["minimum"] = r.GetGte()
		}
		if r.HasLt() {
			schema["exclusiveMaximum"] = r.GetLt()
		}
		if r.HasLte() {
			schema["maximum"] = r.GetLte()
		}
		return schema
	case protoreflect.Int32Kind:
		return object{"type": "integer", "format": "int32"}
	case protoreflect.BoolKind:
		return object{"type": "boolean"}
	case protoreflect.EnumKind:
		var names []string
		for i := range f.Enum().Values().Len() {
			names = append(names, string(f.Enum().Values().Get(i).Name()))
		}
		return object{"type": "string", "enum": names}
	default:
		schema := object{"type": "string"}
		if r := rules.GetString(); r.HasMaxLen() {
			schema["maxLength"] = r.GetMaxLen()
		} else if in := r.GetIn(); len(in) > 0 {
			schema["enum"] = in
		}
		return schema
	}
}

// comment returns the first sentence and the whole of a leading comment.
func comment(d protoreflect.Descriptor) (first, whole string) {
	text := d.ParentFile().SourceLocations().ByDescriptor(d).LeadingComments
	whole = strings.Join(strings.Fields(text), " ")
	first = whole
	if i := strings.Index(whole, ". "); i >= 0 {
		first = whole[:i+1]
	}
	return first, whole
}

func ref(name string) object { return object{"$ref": "#/components/schemas/" + name} }

func problemSchema() object {
	text := func(description string) object { return object{"type": "string", "description": description} }
	var reasons []string
	for i := range calandriav1.Reason_name {
		if i != int32(calandriav1.Reason_REASON_UNSPECIFIED) {
			reasons = append(reasons, statuses.Word(calandriav1.Reason(i)))
		}
	}
	slices.Sort(reasons)
	return object{
		"type": "object", "description": "A refusal, as RFC 9457 problem details.",
		"required": []string{"type", "title", "status", "detail", "instance", "reason", "request_id", "errors"},
		"properties": object{
			"type":       object{"type": "string", "format": "uri", "description": "Names the kind of problem; begins with https://" + statuses.Domain + "/problems/."},
			"title":      text("The kind of problem, in words."),
			"status":     object{"type": "integer", "description": "The HTTP status."},
			"detail":     text("What is wrong with this request, and the way out."),
			"instance":   text("The path that was asked."),
			"reason":     object{"type": "string", "enum": reasons, "description": "The reason, for programs."},
			"request_id": text("Under this id the log holds the request."),
			"errors": object{
				"type": "array", "description": "Every violation.",
				"items": object{
					"type": "object", "required": []string{"field", "value", "limit", "detail"},
					"properties": object{
						"field":  text("Path of the field; empty for the request as a whole."),
						"value":  text("What was given."),
						"limit":  text("What would be accepted, with its unit."),
						"detail": text("What is wrong and the way out."),
					},
				},
			},
		},
	}
}
