package gateway

import (
	"crypto/sha256"
	_ "embed" // the API description
	"encoding/hex"
	"encoding/json"
	"net/http"
	"strings"

	"google.golang.org/grpc/status"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
	"calandria.example/calandria/server/statuses"
	"calandria.example/calandria/server/telemetry"
)

//go:generate go run ./openapi -root ../.. -out openapi.json

//go:embed openapi.json
var openAPI []byte

// Problem is the body of a refusal: RFC 9457, with the reason as the contract
// names it and every violation.
type Problem struct {
	Type      string             `json:"type"`
	Title     string             `json:"title"`
	Status    int                `json:"status"`
	Detail    string             `json:"detail"`
	Instance  string             `json:"instance"`
	Reason    string             `json:"reason"`
	RequestID string             `json:"request_id"`
	Errors    []ProblemViolation `json:"errors"`
}

// ProblemViolation is one field that can not be accepted.
type ProblemViolation struct {
	Field  string `json:"field"`
	Value  string `json:"value"`
	Limit  string `json:"limit"`
	Detail string `json:"detail"`
}

var titles = map[calandriav1.Reason]string{
	calandriav1.Reason_REASON_FIELD_INVALID:          "Some fields can not be accepted",
	calandriav1.Reason_REASON_OUTSIDE_CORRELATION:    "A value lies outside of what the model covers",
	calandriav1.Reason_REASON_OVER_SPECIFIED:         "Too many numbers are given",
	calandriav1.Reason_REASON_UNDER_SPECIFIED:        "Too few numbers are given",
	calandriav1.Reason_REASON_TOO_LARGE:              "The request is too large",
	calandriav1.Reason_REASON_INFEASIBLE:             "No plant can meet these numbers",
	calandriav1.Reason_REASON_NOT_CONVERGED:          "No answer was found",
	calandriav1.Reason_REASON_NOT_FOUND:              "There is no such thing",
	calandriav1.Reason_REASON_DEADLINE:               "The time ran out",
	calandriav1.Reason_REASON_CANCELED:               "The call was given up",
	calandriav1.Reason_REASON_INTERNAL:               "The service failed",
	calandriav1.Reason_REASON_METHOD_NOT_ALLOWED:     "Not with this method",
	calandriav1.Reason_REASON_UNSUPPORTED_MEDIA_TYPE: "Not in this format",
	calandriav1.Reason_REASON_UNAVAILABLE:            "Not ready",
	calandriav1.Reason_REASON_VERSION_MISMATCH:       "Another version of the engine is required",
}

// refuse writes a refusal: a problem, or one line where a value was picked.
// code replaces the HTTP status of the reason if it is not 0.
func (g *Gateway) refuse(a *answer, r *http.Request, o options, s *status.Status, code int) {
	reason := statuses.Reason(s)
	if code == 0 {
		code = statuses.HTTP(reason)
	}
	a.reason = statuses.Word(reason)
	a.body.Reset()
	a.header.Del("Content-Type")
	if o.pick != "" {
		if o.inline {
			code = http.StatusOK
		}
		a.status = code
		a.header.Set("Content-Type", "text/plain; charset=utf-8")
		line := strings.Join(strings.Fields("ERROR "+a.reason+": "+s.Message()), " ")
		a.body.WriteString(line)
		return
	}
	problem := Problem{
		Type:  "https://" + statuses.Domain + "/problems/" + strings.ReplaceAll(strings.ToLower(a.reason), "_", "-"),
		Title: titles[reason], Status: code, Detail: s.Message(), Instance: clip(r.URL.Path),
		Reason: a.reason, RequestID: telemetry.ID(r.Context()), Errors: []ProblemViolation{},
	}
	for _, v := range statuses.Violations(s) {
		problem.Errors = append(problem.Errors, ProblemViolation{v.GetField(), v.GetValue(), v.GetLimit(), v.GetDetail()})
	}
	a.status = code
	a.header.Set("Content-Type", "application/problem+json")
	encoder := json.NewEncoder(&a.body)
	encoder.SetEscapeHTML(false)
	// Strings and whole numbers always encode.
	_ = encoder.Encode(problem)
}

// settle gives a good answer its ETag, and lets a caller that has it already
// keep it.
func (g *Gateway) settle(a *answer, r *http.Request) {
	if a.status != http.StatusOK || a.reason != "" || a.fleeting || r.Method != http.MethodGet && r.Method != http.MethodHead {
		a.header.Set("Cache-Control", "no-store")
		return
	}
	sum := sha256.Sum256(a.body.Bytes())
	tag := `"` + hex.EncodeToString(sum[:16]) + `"`
	a.header.Set("Etag", tag)
	// An engine may be replaced by a newer one at any time: ask again, but do
	// not send again.
	a.header.Set("Cache-Control", "no-cache")
	for _, have := range strings.Split(strings.Join(r.Header.Values("If-None-Match"), ","), ",") {
		if have = strings.TrimPrefix(strings.TrimSpace(have), "W/"); have == tag || have == "*" {
			a.status = http.StatusNotModified
		}
	}
}
