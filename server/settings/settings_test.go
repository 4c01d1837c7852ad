package settings

import (
	"errors"
	"flag"
	"io"
	"strings"
	"testing"
	"time"
)

func TestRead(t *testing.T) {
	environment := map[string]string{"CALANDRIA_GRPC_LISTEN": ":6000", "CALANDRIA_DRAIN": "3s"}
	s, err := Read([]string{"-drain", "4s", "-demo"}, func(k string) string { return environment[k] }, io.Discard)
	want := Settings{GRPCListen: ":6000", HTTPListen: "127.0.0.1:8080", RequestBytes: 1 << 20, Drain: 4 * time.Second, Demo: true}
	if err != nil || s != want {
		t.Errorf("%+v %v, want %+v", s, err, want)
	}
}

func TestEveryProblemAtOnce(t *testing.T) {
	_, err := Read([]string{"-grpc-listen", "x", "-http-listen", "y:99999", "-request-bytes", "1", "-drain", "-1s", "more"}, func(string) string { return "" }, io.Discard)
	if err == nil {
		t.Fatal("accepted")
	}
	for _, word := range []string{"-grpc-listen", "-http-listen", "-request-bytes", "-drain", "more"} {
		if !strings.Contains(err.Error(), word) {
			t.Errorf("%s is not named: %v", word, err)
		}
	}
	if _, err := Read([]string{"-http-listen", "127.0.0.1:50051"}, func(string) string { return "" }, io.Discard); err == nil {
		t.Error("both doors at one port")
	}
}

func TestHelpNamesEverySetting(t *testing.T) {
	var out strings.Builder
	if _, err := Read([]string{"-h"}, func(string) string { return "" }, &out); !errors.Is(err, flag.ErrHelp) {
		t.Fatal(err)
	}
	for _, s := range All() {
		if !strings.Contains(out.String(), s.Flag) || !strings.Contains(out.String(), s.Environment) {
			t.Errorf("%s is not in the help: %s", s.Flag, out.String())
		}
	}
}

func FuzzRead(f *testing.F) {
	f.Add("-drain=1s", "x")
	f.Add("-grpc-listen=[::1]:5", "1048576")
	f.Fuzz(func(t *testing.T, argument, value string) {
		s, err := Read([]string{argument}, func(string) string { return value }, io.Discard)
		if err == nil && (s.RequestBytes <= 0 || s.Drain < 0 || s.GRPCListen == "") {
			t.Errorf("%+v", s)
		}
	})
}
