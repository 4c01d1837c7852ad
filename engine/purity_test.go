package engine_test

import (
	"go/ast"
	"go/parser"
	"go/token"
	"io/fs"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

const module = "calandria.example/calandria/"

// layers lists what each package of the engine may import of the engine, with
// the reason.
var layers = map[string]struct {
	may    []string
	reason string
}{
	"engine":               {nil, "a version needs nothing"},
	"engine/quantity":      {nil, "units stand below everything"},
	"engine/fault":         {nil, "faults stand below everything"},
	"engine/evidence":      {nil, "what a result says of itself stands below everything"},
	"engine/numeric":       {nil, "mathematics knows no plant"},
	"engine/steam":         {[]string{"quantity", "fault", "evidence", "numeric", "steam/release"}, "steam knows no liquor"},
	"engine/steam/release": {nil, "a printed table needs nothing"},
	"engine/liquor":        {[]string{"quantity", "fault", "evidence", "numeric", "steam"}, "a liquor knows no plant"},
	"engine/train":         {[]string{"quantity", "fault", "evidence", "numeric", "steam", "liquor"}, "a plant knows no rating and no message"},
	"engine/vetting":       {[]string{"quantity", "fault", "evidence", "numeric", "steam", "steam/release", "liquor", "train"}, "vetting checks all of it"},
}

// standard lists what the engine may see of the standard library: nothing
// that reads, writes, waits, or runs beside.
var standard = []string{"cmp", "errors", "fmt", "math", "slices", "sort", "strconv", "strings"}

// outside lists what one package of the engine may see beyond the standard
// library: steam asks which instructions the machine has.
var outside = map[string]string{"golang.org/x/sys/cpu": "engine/steam"}

// gates lists packages that only one part of the project may use.
var gates = []struct {
	imported, reason string
	only             []string // folders
}{
	{"flag", "only settings reads flags and environment; main asks whether help was asked for", []string{"server/settings", "server/gateway/openapi", "proto/tools/vendorprotos", "server"}},
	{"google.golang.org/grpc/status", "only statuses makes a status; the gateway and the log read them", []string{"server/statuses", "server/gateway", "server/telemetry", "server/gateway/gen/calandria/v1", "proto/calandria/v1"}},
	{module + "engine/train", "only convert joins messages to a plant; rpc calls the solver", []string{"server/convert", "server/rpc"}},
	{module + "engine/liquor", "only convert joins messages to a liquor", []string{"server/convert", "engine/train"}},
}

type file struct {
	folder string
	syntax *ast.File
	test   bool
}

func goFiles(t *testing.T, set *token.FileSet) []file {
	t.Helper()
	var files []file
	err := filepath.WalkDir("..", func(path string, entry fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if entry.IsDir() && strings.HasPrefix(entry.Name(), ".") && path != ".." {
			return filepath.SkipDir
		}
		if entry.IsDir() || !strings.HasSuffix(path, ".go") {
			return nil
		}
		syntax, err := parser.ParseFile(set, path, nil, parser.SkipObjectResolution)
		if err != nil {
			return err
		}
		folder, err := filepath.Rel("..", filepath.Dir(path))
		files = append(files, file{filepath.ToSlash(folder), syntax, strings.HasSuffix(path, "_test.go")})
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

func imports(t *testing.T, f *ast.File) []string {
	t.Helper()
	var paths []string
	for _, i := range f.Imports {
		path, err := strconv.Unquote(i.Path.Value)
		if err != nil {
			t.Fatal(err)
		}
		paths = append(paths, path)
	}
	return paths
}

// TestEngineIsPure holds every file of the engine to its layer, to the short
// list of the standard library, and to no goroutine and no state.
func TestEngineIsPure(t *testing.T) {
	set := token.NewFileSet()
	seen := map[string]bool{}
	for _, f := range goFiles(t, set) {
		if f.test || f.folder != "engine" && !strings.HasPrefix(f.folder, "engine/") {
			continue
		}
		if f.syntax.Name.Name == "main" {
			continue // a command that writes code is no part of the engine
		}
		seen[f.folder] = true
		layer, ok := layers[f.folder]
		if !ok {
			t.Errorf("%s has no place among the layers", f.folder)
			continue
		}
		for _, path := range imports(t, f.syntax) {
			if own, inside := strings.CutPrefix(path, module+"engine/"); inside {
				if !slices.Contains(layer.may, own) {
					t.Errorf("%s imports %s: %s", f.folder, path, layer.reason)
				}
			} else if !slices.Contains(standard, path) && outside[path] != f.folder {
				t.Errorf("%s imports %s: the engine is pure", f.folder, path)
			}
		}
		ast.Inspect(f.syntax, func(n ast.Node) bool {
			switch n := n.(type) {
			case *ast.GoStmt:
				t.Errorf("%s: a goroutine: running beside belongs to those who call", set.Position(n.Pos()))
			case *ast.AssignStmt:
				for _, left := range n.Lhs {
					if name, ok := left.(*ast.Ident); ok && n.Tok != token.DEFINE && global(f.syntax, name.Name) {
						t.Errorf("%s: %s changes: the engine has no state", set.Position(n.Pos()), name.Name)
					}
				}
			}
			return true
		})
	}
	for folder := range layers {
		if !seen[folder] {
			t.Errorf("%s stands among the layers but does not exist", folder)
		}
	}
}

// global reports whether name is a variable of the package, in this file.
func global(f *ast.File, name string) bool {
	for _, d := range f.Decls {
		if g, ok := d.(*ast.GenDecl); ok && g.Tok == token.VAR {
			for _, s := range g.Specs {
				if v, ok := s.(*ast.ValueSpec); ok && slices.ContainsFunc(v.Names, func(n *ast.Ident) bool { return n.Name == name }) {
					return true
				}
			}
		}
	}
	return false
}

func TestGates(t *testing.T) {
	for _, f := range goFiles(t, token.NewFileSet()) {
		if f.test {
			continue
		}
		for _, path := range imports(t, f.syntax) {
			for _, gate := range gates {
				if path == gate.imported && !slices.Contains(gate.only, f.folder) {
					t.Errorf("%s imports %s: %s", f.folder, path, gate.reason)
				}
			}
		}
	}
}

// TestClientsNeverPullTheGateway keeps the generated messages free of the REST
// face.
func TestClientsNeverPullTheGateway(t *testing.T) {
	for _, f := range goFiles(t, token.NewFileSet()) {
		if f.folder != "proto/calandria/v1" {
			continue
		}
		for _, path := range imports(t, f.syntax) {
			if strings.Contains(path, "grpc-gateway") {
				t.Errorf("proto/calandria/v1 imports %s", path)
			}
		}
	}
}
