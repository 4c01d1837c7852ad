// Package statuses makes every status that a caller sees: one reason, its
// code and HTTP status, and what a program and a person need to act on it.
package statuses

import (
	"context"
	"errors"
	"fmt"
	"strconv"
	"strings"

	"google.golang.org/genproto/googleapis/rpc/errdetails"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/protoadapt"

	"calandria.example/calandria/engine/fault"
	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/convert"
)

// Domain is the domain of every ErrorInfo.
const Domain = "calandria.example"

type mapping struct {
	code codes.Code
	http int
}

// mappings holds the code and the HTTP status of each reason.
var mappings = map[calandriav1.Reason]mapping{
	calandriav1.Reason_REASON_FIELD_INVALID:          {codes.InvalidArgument, 400},
	calandriav1.Reason_REASON_OUTSIDE_CORRELATION:    {codes.InvalidArgument, 400},
	calandriav1.Reason_REASON_OVER_SPECIFIED:         {codes.InvalidArgument, 400},
	calandriav1.Reason_REASON_UNDER_SPECIFIED:        {codes.InvalidArgument, 400},
	calandriav1.Reason_REASON_TOO_LARGE:              {codes.InvalidArgument, 413},
	calandriav1.Reason_REASON_INFEASIBLE:             {codes.FailedPrecondition, 422},
	calandriav1.Reason_REASON_NOT_CONVERGED:          {codes.FailedPrecondition, 422},
	calandriav1.Reason_REASON_NOT_FOUND:              {codes.NotFound, 404},
	calandriav1.Reason_REASON_DEADLINE:               {codes.DeadlineExceeded, 504},
	calandriav1.Reason_REASON_CANCELED:               {codes.Canceled, 499},
	calandriav1.Reason_REASON_INTERNAL:               {codes.Internal, 500},
	calandriav1.Reason_REASON_METHOD_NOT_ALLOWED:     {codes.Unimplemented, 405},
	calandriav1.Reason_REASON_UNSUPPORTED_MEDIA_TYPE: {codes.InvalidArgument, 415},
	calandriav1.Reason_REASON_UNAVAILABLE:            {codes.Unavailable, 503},
	calandriav1.Reason_REASON_VERSION_MISMATCH:       {codes.FailedPrecondition, 412},
}

// HTTP returns the HTTP status of a reason.
func HTTP(reason calandriav1.Reason) int {
	if m, ok := mappings[reason]; ok {
		return m.http
	}
	return 500
}

// Word returns a reason as ErrorInfo carries it, such as FIELD_INVALID.
func Word(reason calandriav1.Reason) string {
	return strings.TrimPrefix(reason.String(), "REASON_")
}

// Reason reads the reason of a status that this package made; a status from
// elsewhere, such as one of the transport, is sorted by its code.
func Reason(s *status.Status) calandriav1.Reason {
	for _, d := range s.Details() {
		if info, ok := d.(*errdetails.ErrorInfo); ok && info.GetDomain() == Domain {
			return calandriav1.Reason(calandriav1.Reason_value["REASON_"+info.GetReason()])
		}
	}
	switch s.Code() {
	case codes.Canceled:
		return calandriav1.Reason_REASON_CANCELED
	case codes.DeadlineExceeded:
		return calandriav1.Reason_REASON_DEADLINE
	case codes.NotFound, codes.Unimplemented:
		return calandriav1.Reason_REASON_NOT_FOUND
	case codes.ResourceExhausted:
		return calandriav1.Reason_REASON_TOO_LARGE
	case codes.Unavailable:
		return calandriav1.Reason_REASON_UNAVAILABLE
	default:
		return calandriav1.Reason_REASON_INTERNAL
	}
}

// Violations reads the violations that a status carries.
func Violations(s *status.Status) []*calandriav1.Violation {
	for _, d := range s.Details() {
		if v, ok := d.(*calandriav1.Violations); ok {
			return v.GetViolations()
		}
	}
	return nil
}

// New makes a status with its details.
func New(reason calandriav1.Reason, message string, metadata map[string]string, violations ...*calandriav1.Violation) *status.Status {
	m, ok := mappings[reason]
	if !ok {
		m = mapping{codes.Internal, 500}
	}
	details := []protoadapt.MessageV1{&errdetails.ErrorInfo{Reason: Word(reason), Domain: Domain, Metadata: metadata}}
	if len(violations) > 0 {
		bad := &errdetails.BadRequest{}
		for _, v := range violations {
			bad.FieldViolations = append(bad.FieldViolations, &errdetails.BadRequest_FieldViolation{
				Field: v.GetField(), Description: v.GetDetail(), Reason: Word(reason),
			})
		}
		details = append(details, bad, &calandriav1.Violations{Violations: violations})
	}
	s, err := status.New(m.code, message).WithDetails(details...)
	if err != nil {
		// Only an OK status or a message that does not marshal could bring
		// this about, and there is neither.
		return status.New(m.code, message)
	}
	return s
}

// Invalid makes the status of fields that can not be accepted.
func Invalid(violations ...*calandriav1.Violation) *status.Status {
	message := violations[0].GetDetail()
	if n := len(violations); n > 1 {
		message = fmt.Sprintf("%d fields can not be accepted. First: %s", n, message)
	}
	return New(calandriav1.Reason_REASON_FIELD_INVALID, message, nil, violations...)
}

// TooLarge makes the status of a request over the limit in force, in bytes.
func TooLarge(what string, sent, limit int) *status.Status {
	return New(calandriav1.Reason_REASON_TOO_LARGE,
		fmt.Sprintf("The %s is too large: %d bytes or more were sent, %d are read. Do not send it again; make it smaller.", what, sent, limit),
		map[string]string{"sent": strconv.Itoa(sent), "limit": strconv.Itoa(limit)},
		&calandriav1.Violation{Value: fmt.Sprintf("%d bytes", sent), Limit: fmt.Sprintf("%d bytes", limit), Detail: "The " + what + " is too large."})
}

// VersionMismatch makes the status of a request that requires another version of
// the engine than this one.
func VersionMismatch(field, required, is string) *status.Status {
	message := fmt.Sprintf("%s is %q; this engine is version %s. Ask one of the version that is required, or drop %s.", field, required, is, field)
	return New(calandriav1.Reason_REASON_VERSION_MISMATCH, message,
		map[string]string{"required": required, "engine_version": is},
		&calandriav1.Violation{Field: field, Value: strconv.Quote(required), Limit: is, Detail: message})
}

// Internal makes the status of a fault of the service itself. The caller
// learns the id, under which the log holds the rest.
func Internal(id string) *status.Status {
	return New(calandriav1.Reason_REASON_INTERNAL, "The service failed. Quote request "+id+" to those who run it.", map[string]string{"request_id": id})
}

// From makes the status of an error that a handler returned. known is false
// for an error that is not one of the engine's faults: the status then hides
// it behind id, and the caller of From logs it.
func From(err error, id string) (s *status.Status, known bool) {
	if s, ok := status.FromError(err); ok && len(s.Details()) > 0 {
		return s, true
	}
	// The transport ends a call with a bare status, handlers with an error of
	// the context; neither's own text is shown.
	switch code := status.Code(err); {
	case code == codes.DeadlineExceeded, errors.Is(err, context.DeadlineExceeded):
		return New(calandriav1.Reason_REASON_DEADLINE, "The time allowed for the answer ran out.", nil), true
	case code == codes.Canceled, errors.Is(err, context.Canceled):
		return New(calandriav1.Reason_REASON_CANCELED, "The caller gave up waiting.", nil), true
	}
	faults, all := flatten(err)
	if !all || len(faults) == 0 {
		return Internal(id), false
	}
	switch f := faults[0].(type) {
	case *fault.Specification:
		return specification(f), true
	case *fault.Infeasible:
		return infeasible(f), true
	case *fault.NotConverged:
		return New(calandriav1.Reason_REASON_NOT_CONVERGED,
			fmt.Sprintf("No answer was found in %d iterations; the %s was left unmet by %.3g of its own size. Check the given numbers against each other, or give one more as a guide and leave another out.", f.Iterations, f.Where, f.Residual),
			map[string]string{"iterations": strconv.Itoa(f.Iterations), "residual": short(f.Residual), "where": f.Where}), true
	}
	var violations []*calandriav1.Violation
	reason := calandriav1.Reason_REASON_OUTSIDE_CORRELATION
	metadata := map[string]string{}
	for _, f := range faults {
		switch f := f.(type) {
		case *fault.Invalid:
			reason = calandriav1.Reason_REASON_FIELD_INVALID
			violations = append(violations, &calandriav1.Violation{
				Field: f.Field, Value: f.Value, Limit: f.Limit,
				Detail: sentence(fmt.Sprintf("%s is %s; accepted: %s. Way out: %s", f.Field, f.Value, f.Limit, f.WayOut)),
			})
		case *fault.Range:
			violations = append(violations, outside(f))
			value, unit := convert.Practical(f.Value, f.Unit)
			low, _ := convert.Practical(f.Min, f.Unit)
			high, _ := convert.Practical(f.Max, f.Unit)
			metadata = map[string]string{"quantity": f.Quantity, "value": short(value), "min": short(low), "max": short(high), "unit": unit, "source": f.Source}
		}
	}
	if reason == calandriav1.Reason_REASON_FIELD_INVALID {
		return Invalid(violations...), true
	}
	return New(reason, violations[0].GetDetail(), metadata, violations...), true
}

// flatten lists the faults that err joins; all is false if it holds anything
// else.
func flatten(err error) (faults []fault.Fault, all bool) {
	if joined, ok := err.(interface{ Unwrap() []error }); ok {
		all = true
		for _, e := range joined.Unwrap() {
			more, ok := flatten(e)
			faults, all = append(faults, more...), all && ok
		}
		return faults, all
	}
	var f fault.Fault
	if errors.As(err, &f) {
		return []fault.Fault{f}, true
	}
	return nil, false
}

func outside(f *fault.Range) *calandriav1.Violation {
	value, unit := convert.Practical(f.Value, f.Unit)
	low, _ := convert.Practical(f.Min, f.Unit)
	high, _ := convert.Practical(f.Max, f.Unit)
	limit := fmt.Sprintf("%s to %s %s", short(low), short(high), unit)
	return &calandriav1.Violation{
		Field: f.Quantity, Value: short(value) + " " + unit, Limit: limit,
		Detail: fmt.Sprintf("%s is %s %s; %s covers %s. Stay inside that range.", f.Quantity, short(value), unit, f.Source, limit),
	}
}

func specification(f *fault.Specification) *status.Status {
	var violations []*calandriav1.Violation
	if f.Over {
		list := strings.Join(f.Conflict, ", ")
		for _, field := range f.Conflict {
			violations = append(violations, &calandriav1.Violation{
				Field: field, Value: "given", Limit: "at most " + strconv.Itoa(len(f.Conflict)-1) + " of this set",
				Detail: fmt.Sprintf("%s follows from the others of the set; drop it, or drop another of them.", field),
			})
		}
		return New(calandriav1.Reason_REASON_OVER_SPECIFIED,
			fmt.Sprintf("Too many numbers are given: %s fix the same thing twice. Drop any one of them.", list),
			map[string]string{"conflict": list}, violations...)
	}
	list := strings.Join(f.Closers, ", ")
	for _, field := range f.Closers {
		violations = append(violations, &calandriav1.Violation{
			Field: field, Value: "left out", Limit: "one of this set is needed",
			Detail: fmt.Sprintf("%s would close the gap if it were given.", field),
		})
	}
	count := "One more number is"
	if f.Missing != 1 {
		count = strconv.Itoa(f.Missing) + " more numbers are"
	}
	return New(calandriav1.Reason_REASON_UNDER_SPECIFIED,
		fmt.Sprintf("%s needed. Any of these narrows the gap: %s.", count, list),
		map[string]string{"missing": strconv.Itoa(f.Missing), "closers": list}, violations...)
}

var causes = map[fault.Cause]string{
	fault.NoDrivingForce:      "no driving force",
	fault.NegativeEvaporation: "negative evaporation",
	fault.WeakerProduct:       "product weaker than feed",
	fault.NegativeFlow:        "negative quantity",
	fault.OutOfBounds:         "outside of what is possible",
}

func infeasible(f *fault.Infeasible) *status.Status {
	amount, unit := convert.Practical(f.Amount, f.Unit)
	message := fmt.Sprintf("No such plant can run (%s): %s It fails by %s %s.", causes[f.Cause], f.Detail, short(amount), unit)
	return New(calandriav1.Reason_REASON_INFEASIBLE, message,
		map[string]string{"effect": f.Effect, "cause": causes[f.Cause], "field": f.Field, "amount": short(amount), "unit": unit},
		&calandriav1.Violation{Field: f.Field, Value: short(amount) + " " + unit, Limit: "a plant that can run", Detail: f.Detail})
}

func short(v float64) string { return strconv.FormatFloat(v, 'g', 7, 64) }

func sentence(s string) string {
	if strings.HasSuffix(s, ".") {
		return s
	}
	return s + "."
}
