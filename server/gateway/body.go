package gateway

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"regexp"
	"strconv"
	"strings"
	"unicode/utf16"
	"unicode/utf8"

	"google.golang.org/protobuf/reflect/protoreflect"
	"google.golang.org/protobuf/types/dynamicpb"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// checkBody reads a JSON body strictly against a message and returns all that
// is wrong with it.
func checkBody(body []byte, d protoreflect.MessageDescriptor, depthMax int) []*calandriav1.Violation {
	b := &bodyCheck{body: body, depthMax: depthMax}
	if len(bytes.TrimSpace(body)) == 0 {
		b.add("", "empty", "a JSON object", "Send the request as JSON.")
		return b.violations
	}
	if bytes.HasPrefix(body, []byte("\ufeff")) {
		b.add("", "begun with a byte-order mark", "JSON in UTF-8 without one", "Save the text as UTF-8 without byte-order mark (BOM).")
		return b.violations
	}
	if !utf8.Valid(body) {
		b.add("", "not UTF-8 text", "JSON in UTF-8", "Save or send the text as UTF-8.")
		return b.violations
	}
	b.tokens = json.NewDecoder(bytes.NewReader(body))
	b.tokens.UseNumber()
	m := dynamicpb.NewMessage(d)
	whole, err := b.document(m)
	if err != nil {
		b.syntax(err)
	}
	if whole {
		b.rules(m)
	}
	return b.violations
}

type bodyCheck struct {
	check
	body     []byte
	tokens   *json.Decoder
	depthMax int
}

// errTooDeep ends a walk; the complaint is already made.
var errTooDeep = errors.New("too deep")

// document reads the whole body into m; whole tells whether it could be read to
// the end of the object.
func (b *bodyCheck) document(m *dynamicpb.Message) (whole bool, err error) {
	first, err := b.tokens.Token()
	if err != nil {
		return false, err
	}
	if first != json.Delim('{') {
		b.add("", kindOf(first), "a JSON object", "Send one object in braces.")
		return false, nil
	}
	if err := b.object(m, "", 1); err != nil {
		return false, err
	}
	if _, err := b.tokens.Token(); !errors.Is(err, io.EOF) {
		b.add("", "followed by more data", "one JSON object and nothing after it", "Send one request at a time.")
	}
	return true, nil
}

// object reads the rest of an object whose brace is open.
func (b *bodyCheck) object(m *dynamicpb.Message, path string, depth int) error {
	if depth > b.depthMax {
		return b.tooDeep(path)
	}
	seen := map[string]bool{}
	for b.tokens.More() {
		key, err := b.tokens.Token()
		if err != nil {
			return err
		}
		name, ok := key.(string)
		if !ok {
			return &json.SyntaxError{}
		}
		field := b.field(m.Descriptor(), path, name)
		full := join(path, clip(name))
		if seen[name] {
			b.add(full, "given twice", "once", "Drop one of the two.")
		}
		seen[name] = true
		if field == nil {
			if err := b.skip(depth); err != nil {
				return err
			}
			continue
		}
		b.oneof(m, field, path)
		if field.IsList() {
			err = b.list(m, field, full, depth)
		} else {
			err = b.single(field, full, depth, func(v protoreflect.Value) { m.Set(field, v) })
		}
		if err != nil {
			return err
		}
	}
	_, err := b.tokens.Token() // the closing brace
	return err
}

func (b *bodyCheck) list(m *dynamicpb.Message, field protoreflect.FieldDescriptor, path string, depth int) error {
	if depth >= b.depthMax {
		return b.tooDeep(path)
	}
	first, err := b.tokens.Token()
	if err != nil {
		return err
	}
	if first != json.Delim('[') {
		b.add(path, kindOf(first), "a list in square brackets", "Put the values into [ ].")
		return b.skipRest(first, depth)
	}
	list := m.Mutable(field).List()
	for i := 0; b.tokens.More(); i++ {
		start := b.tokens.InputOffset()
		token, err := b.tokens.Token()
		if err != nil {
			return err
		}
		if number, ok := plainNumber(field, token); ok {
			list.Append(number)
			continue
		}
		item := fmt.Sprintf("%s[%d]", path, i)
		if token == nil && field.Kind() != protoreflect.MessageKind {
			b.add(item, "null", "a value", "Every item needs one: take this item out, and what goes with it in other lists.")
		} else if err := b.value(field, item, depth+1, start, token, func(v protoreflect.Value) { list.Append(v) }); err != nil {
			return err
		}
		if list.Len() == i { // a faulty item keeps its place, so that the others keep theirs
			list.Append(list.NewElement())
			if b.unread == nil {
				b.unread = map[string]bool{}
			}
			b.unread[item] = true
		}
	}
	_, err = b.tokens.Token() // the closing bracket
	return err
}

// plainNumber is an item of a list of numbers that nothing is wrong with: JSON
// writes numbers no more freely than number reads them. Columns are long, and
// looking each item up in words costs more than the rest of reading it.
func plainNumber(field protoreflect.FieldDescriptor, token json.Token) (v protoreflect.Value, ok bool) {
	text, ok := token.(json.Number)
	if !ok || field.Kind() != protoreflect.DoubleKind {
		return v, false
	}
	number, err := text.Float64()
	return protoreflect.ValueOfFloat64(number), err == nil
}

// single reads one value of a field and hands it to set if it is right.
func (b *bodyCheck) single(field protoreflect.FieldDescriptor, path string, depth int, set func(protoreflect.Value)) error {
	start := b.tokens.InputOffset()
	token, err := b.tokens.Token()
	if err != nil {
		return err
	}
	return b.value(field, path, depth, start, token, set)
}

// value reads the rest of a value of a field, whose first token is read and
// begins at start, and hands it to set if it is right.
func (b *bodyCheck) value(field protoreflect.FieldDescriptor, path string, depth int, start int64, token json.Token, set func(protoreflect.Value)) error {
	if field.Kind() == protoreflect.MessageKind {
		if token != json.Delim('{') {
			wayOut := "Its fields are " + strings.Join(namesOf(field.Message()), ", ") + "."
			if token == nil {
				wayOut = "Leave it out. " + wayOut
			}
			b.add(path, kindOf(token), "an object in braces", wayOut)
			return b.skipRest(token, depth)
		}
		inner := dynamicpb.NewMessage(field.Message())
		if err := b.object(inner, path, depth+1); err != nil {
			return err
		}
		set(protoreflect.ValueOfMessage(inner))
		return nil
	}
	if token == nil {
		b.add(path, "null", "a value", "Leave the field out to have it solved for.")
		return nil
	}
	switch field.Kind() {
	case protoreflect.DoubleKind:
		switch v := token.(type) {
		case json.Number:
			if f, ok := b.number(field, path, v.String()); ok {
				set(protoreflect.ValueOfFloat64(f))
			}
		case string:
			if f, ok := b.number(field, path, v); ok {
				b.add(path, strconv.Quote(clip(v)), "a plain number", "Write it without quotes: "+strconv.FormatFloat(f, 'g', -1, 64)+".")
			}
		default:
			b.add(path, kindOf(token), "a number", "Write digits with a decimal point.")
			return b.skipRest(token, depth)
		}
	case protoreflect.StringKind:
		v, ok := token.(string)
		if !ok {
			b.add(path, kindOf(token), "a text in quotes", "Put it into quotes.")
			return b.skipRest(token, depth)
		}
		if halfPair(b.body[start:b.tokens.InputOffset()]) {
			b.add(path, "half of a surrogate pair", "whole characters", "Send the character itself, or both of its \\u escapes.")
			return nil
		}
		set(protoreflect.ValueOfString(v))
	default:
		b.add(path, kindOf(token), "not in this request", "Leave it out.")
		return b.skipRest(token, depth)
	}
	return nil
}

// halfPair tells whether JSON text escapes one half of a surrogate pair only.
// This package's reader would put a replacement character in its place, but
// the one that reads the request for the call refuses it.
func halfPair(text []byte) bool {
	const escape = 6 // as in \ud83d
	unit := func(i int) rune {
		if i+escape > len(text) || text[i] != '\\' || text[i+1] != 'u' {
			return -1
		}
		u, err := strconv.ParseUint(string(text[i+2:i+escape]), 16, 16)
		if err != nil {
			return -1
		}
		return rune(u)
	}
	for i := 0; i < len(text); i++ {
		if text[i] != '\\' {
			continue
		}
		if u := unit(i); !utf16.IsSurrogate(u) {
			i++ // past what is escaped, which may be a backslash
			continue
		} else if utf16.DecodeRune(u, unit(i+escape)) == utf8.RuneError {
			return true
		}
		i += 2*escape - 1
	}
	return false
}

// skip passes over the next value.
func (b *bodyCheck) skip(depth int) error {
	token, err := b.tokens.Token()
	if err != nil {
		return err
	}
	return b.skipRest(token, depth)
}

// skipRest passes over the rest of a value whose first token is read.
func (b *bodyCheck) skipRest(first json.Token, depth int) error {
	open := 0
	for token := first; ; {
		switch token {
		case json.Delim('{'), json.Delim('['):
			open++
			if depth+open > b.depthMax {
				return b.tooDeep("")
			}
		case json.Delim('}'), json.Delim(']'):
			open--
		}
		if open <= 0 {
			return nil
		}
		var err error
		if token, err = b.tokens.Token(); err != nil {
			return err
		}
	}
}

func (b *bodyCheck) tooDeep(path string) error {
	b.add(path, "nested too deeply", fmt.Sprintf("at most %d levels", b.depthMax), "No request of this API needs more.")
	return errTooDeep
}

var (
	notANumber   = regexp.MustCompile(`^[+-]?(NaN|nan|Infinity|inf|Inf)`)
	splitDecimal = regexp.MustCompile(`[0-9],[0-9]*$`)
)

// syntax words an error of the JSON reader, without its own text.
func (b *bodyCheck) syntax(err error) {
	if errors.Is(err, errTooDeep) {
		return
	}
	// Where the value begins that can not be read. The error's own offset counts
	// no commas, colons and brackets, and so falls behind along a list.
	at := int(b.tokens.InputOffset())
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
		b.add("", "cut off", "a whole JSON object", "A brace, bracket or quote is not closed.")
		return
	}
	start := max(at-24, 0)
	for start > 0 && !utf8.RuneStart(b.body[start]) {
		start--
	}
	before := b.body[start:at]
	line := 1 + bytes.Count(b.body[:at], []byte("\n"))
	where := fmt.Sprintf("not JSON near line %d, after %q", line, before)
	wayOut := "Check commas, quotes and brackets."
	if notANumber.Match(b.body[at:]) {
		wayOut = "JSON has no NaN or Infinity; leave the field out if the value is not known."
	} else if splitDecimal.Match(before) {
		wayOut = "It looks like a decimal comma: write a decimal point."
	}
	b.add("", where, "valid JSON", wayOut)
}

func kindOf(token json.Token) string {
	switch v := token.(type) {
	case nil:
		return "null"
	case bool:
		return strconv.FormatBool(v)
	case string:
		return strconv.Quote(clip(v))
	case json.Number:
		return clip(v.String())
	case json.Delim:
		if v == '[' {
			return "a list"
		}
		return "an object"
	}
	return "something else"
}
