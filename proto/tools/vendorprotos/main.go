// Command vendorprotos writes the third-party .proto files that ours import,
// from the descriptors in the Go modules that go.mod pins, so that go.sum
// locks them and no registry of protos is needed.
package main

import (
	"flag"
	"fmt"
	"os"
	"path/filepath"

	_ "buf.build/gen/go/bufbuild/protovalidate/protocolbuffers/go/buf/validate"
	"github.com/jhump/protoreflect/v2/protoprint"
	_ "google.golang.org/genproto/googleapis/api/annotations"
	"google.golang.org/protobuf/reflect/protoregistry"
)

const header = "// Copied from descriptors by proto/tools/vendorprotos; Apache-2.0, see proto/vendored/LICENSE.\n"

func main() {
	out := flag.String("out", "proto/vendored", "folder to write to")
	flag.Parse()
	for _, path := range []string{
		"buf/validate/validate.proto",
		"google/api/annotations.proto",
		"google/api/http.proto",
	} {
		if err := write(*out, path); err != nil {
			fmt.Fprintln(os.Stderr, "vendorprotos:", err)
			os.Exit(1)
		}
	}
}

func write(out, path string) error {
	file, err := protoregistry.GlobalFiles.FindFileByPath(path)
	if err != nil {
		return fmt.Errorf("%s: %w", path, err)
	}
	printer := protoprint.Printer{}
	text, err := printer.PrintProtoToString(file)
	if err != nil {
		return fmt.Errorf("%s: %w", path, err)
	}
	target := filepath.Join(out, filepath.FromSlash(path))
	if err := os.MkdirAll(filepath.Dir(target), 0o755); err != nil {
		return err
	}
	return os.WriteFile(target, []byte(header+text), 0o644)
}
