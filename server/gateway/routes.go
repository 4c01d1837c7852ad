package gateway

import (
	"net/http"
	"slices"
	"strings"

	"google.golang.org/genproto/googleapis/api/annotations"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"

	calandriav1 "calandria.example/calandria/proto/calandria/v1"
)

// route is one method of one path, as the protos annotate it.
type route struct {
	segments []string // "*" stands for a variable
	method   string   // HTTP method
	rpc      protoreflect.MethodDescriptor
}

// files are the protos whose services have a REST face.
var files = []protoreflect.FileDescriptor{
	calandriav1.File_calandria_v1_steam_proto,
	calandriav1.File_calandria_v1_train_proto,
	calandriav1.File_calandria_v1_engine_proto,
}

// routesOf reads the routes from the google.api.http annotations.
func routesOf() []route {
	var routes []route
	for _, file := range files {
		for i := range file.Services().Len() {
			methods := file.Services().Get(i).Methods()
			for j := range methods.Len() {
				method := methods.Get(j)
				rule, ok := proto.GetExtension(method.Options(), annotations.E_Http).(*annotations.HttpRule)
				if !ok || rule == nil {
					continue
				}
				for _, r := range append([]*annotations.HttpRule{rule}, rule.GetAdditionalBindings()...) {
					verb, path := http.MethodGet, r.GetGet()
					if path == "" {
						verb, path = http.MethodPost, r.GetPost()
					}
					routes = append(routes, route{segmentsOf(path), verb, method})
				}
			}
		}
	}
	return routes
}

func segmentsOf(path string) []string {
	segments := strings.Split(strings.TrimPrefix(path, "/"), "/")
	for i, s := range segments {
		if strings.HasPrefix(s, "{") {
			segments[i] = "*"
		}
	}
	return segments
}

func (r *route) path() string { return "/" + strings.Join(r.segments, "/") }

func (r *route) matches(segments []string) bool {
	if len(segments) != len(r.segments) {
		return false
	}
	for i, s := range r.segments {
		if s != segments[i] && (s != "*" || segments[i] == "") {
			return false
		}
	}
	return true
}

// find returns the route of a request, and the methods that its path allows;
// none for a path that does not exist.
func find(routes []route, method, path string) (found *route, allowed []string) {
	segments := strings.Split(strings.TrimPrefix(path, "/"), "/")
	for i := range routes {
		if !routes[i].matches(segments) {
			continue
		}
		allowed = append(allowed, routes[i].method)
		if routes[i].method == method {
			found = &routes[i]
		}
	}
	if slices.Contains(allowed, http.MethodGet) {
		allowed = append(allowed, http.MethodHead)
	}
	if len(allowed) > 0 {
		allowed = append(allowed, http.MethodOptions)
	}
	return found, allowed
}
