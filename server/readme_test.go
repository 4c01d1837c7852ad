package main

import (
	"context"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"time"

	"calandria.example/calandria/server/settings"
)

// blockForm finds the fenced blocks of a Markdown text.
var blockForm = regexp.MustCompile("(?ms)^```([a-z]+)\n(.*?)^```$")

func readme(t *testing.T) string {
	t.Helper()
	text, err := os.ReadFile("../README.md")
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

// TestReadmeIsTrue runs every command that the README shows and compares every
// answer; the two commands that start a server and the tests are left to
// TestDemoCommand and to whoever runs this.
func TestReadmeIsTrue(t *testing.T) {
	for _, tool := range []string{"sh", "curl", "grep"} {
		if _, err := exec.LookPath(tool); err != nil {
			t.Skipf("the README was NOT tried: %s is not installed here", tool)
		}
	}
	s := start(t)
	here := strings.NewReplacer("http://127.0.0.1:8080", s.httpURL, "127.0.0.1:50051", s.grpcAddress)
	text := readme(t)
	if lines := strings.Count(text, "\n"); lines >= 150 {
		t.Errorf("%d lines", lines)
	}
	blocks := blockForm.FindAllStringSubmatch(text, -1)
	shown := 0
	for i, block := range blocks {
		kind, code := block[1], here.Replace(block[2])
		var answer string
		switch {
		case kind == "sh" && strings.HasPrefix(code, "curl "):
			answer = command(t, "sh", "-c", code)
		case kind == "go":
			// Inside of the module, so that its imports are found.
			folder, err := os.MkdirTemp(".", "readme")
			if err != nil {
				t.Fatal(err)
			}
			t.Cleanup(func() {
				if err := os.RemoveAll(folder); err != nil {
					t.Error(err)
				}
			})
			program := filepath.Join(folder, "main.go")
			if err := os.WriteFile(program, []byte(code), 0o600); err != nil {
				t.Fatal(err)
			}
			answer = command(t, "go", "run", program)
		case kind == "sh" && (code == "go run ./server -demo\n" || code == "go test ./...\n"), kind == "text":
			continue
		default:
			t.Errorf("a block that is not tried: %s", code)
			continue
		}
		shown++
		if i+1 == len(blocks) || blocks[i+1][1] != "text" {
			t.Errorf("no answer is shown for %s", code)
			continue
		}
		if want := strings.TrimSpace(blocks[i+1][2]); strings.TrimSpace(answer) != want {
			t.Errorf("%s answers\n%s\nthe README shows\n%s", code, answer, want)
		}
	}
	if shown < 6 {
		t.Errorf("%d commands tried", shown)
	}
}

func command(t *testing.T, name string, arguments ...string) string {
	t.Helper()
	ctx, cancel := context.WithTimeout(t.Context(), 2*time.Minute)
	defer cancel()
	text, err := exec.CommandContext(ctx, name, arguments...).CombinedOutput()
	if err != nil {
		t.Errorf("%s %v: %v: %s", name, arguments, err, text)
	}
	return string(text)
}

// TestSettingsTable keeps the README's table equal to the settings.
func TestSettingsTable(t *testing.T) {
	text := readme(t)
	for _, s := range settings.All() {
		environment := ""
		if s.Environment != "" {
			environment = "`" + s.Environment + "`"
		}
		row := "| `" + s.Flag + "` | " + environment + " | `" + s.Default + "` | " + s.Meaning + " |\n"
		if !strings.Contains(text, row) {
			t.Errorf("the README lacks %s", row)
		}
	}
	if rows := strings.Count(text, "\n| `-"); rows != len(settings.All()) {
		t.Errorf("%d rows, %d settings", rows, len(settings.All()))
	}
}

// TestDemoCommand runs the README's first command and the lines that it offers
// to paste.
func TestDemoCommand(t *testing.T) {
	p := startProcess(t, "-demo")
	deadline := time.Now().Add(10 * time.Second)
	for !strings.Contains(p.out.String(), "Still serving") {
		if time.Now().After(deadline) {
			t.Fatalf("no demo: %s %s", p.out.String(), p.log.String())
		}
		time.Sleep(10 * time.Millisecond)
	}
	out := p.out.String()
	pasted := 0
	for _, line := range strings.Split(out, "\n") {
		if !strings.HasPrefix(line, "curl ") {
			if len(line) > 80 {
				t.Errorf("wider than 80 columns: %q", line)
			}
			continue
		}
		if _, err := exec.LookPath("curl"); err != nil {
			continue
		}
		pasted++
		if answer := command(t, "sh", "-c", line); strings.Contains(answer, "problems/") || answer == "" {
			t.Errorf("%s answers %s", line, answer)
		}
	}
	for _, word := range []string{"boiling-point rise", "Local", "codes", p.grpcAddress, p.httpURL} {
		if !strings.Contains(out, word) {
			t.Errorf("%q is missing: %s", word, out)
		}
	}
	if pasted == 1 {
		t.Error("one line to paste, want two")
	}
}
