package main

import (
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
)

// lastWeek stands for a result that must not be lost.
const lastWeek = "the result of last week\n"

// tmpfs mounts a file system of the given size in bytes. Only root may; without, ok
// is false and the log says so.
func tmpfs(t *testing.T, size string) (dir string, ok bool) {
	t.Helper()
	dir = t.TempDir()
	if err := syscall.Mount("tmpfs", dir, "tmpfs", 0, "size="+size); err != nil {
		t.Logf("no file system of %s bytes to be had (%v): this part of the test needs root", size, err)
		return "", false
	}
	t.Cleanup(func() {
		if err := syscall.Unmount(dir, 0); err != nil {
			t.Error(err)
		}
	})
	return dir, true
}

// survived reports anything but the old file in a folder.
func survived(t *testing.T, dir string, others ...string) {
	t.Helper()
	if b, err := os.ReadFile(filepath.Join(dir, "out.json")); err != nil || string(b) != lastWeek {
		t.Errorf("the old file: %d bytes, %v", len(b), err)
	}
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, e := range entries {
		names = append(names, e.Name())
	}
	if want := append([]string{"out.json"}, others...); len(names) != len(want) {
		t.Errorf("in the folder: %q, want %q", names, want)
	}
}

func putOldFile(t *testing.T, dir string) string {
	t.Helper()
	name := filepath.Join(dir, "out.json")
	if err := os.WriteFile(name, []byte(lastWeek), 0o644); err != nil {
		t.Fatal(err)
	}
	return name
}

func longIsotherm(out string) []string {
	return []string{"isotherm", "--fluid", "water", "--temperature", "500 K", "--count", "3000", "--format", "json", "--out", out}
}

// TestFullDisk writes some 500 kB, and a model of some 20 kB, where 12 kB fit.
func TestFullDisk(t *testing.T) {
	dir, ok := tmpfs(t, "12k")
	if !ok {
		if _, message, code := invoke(t, longIsotherm("/dev/full")...); code != statusInput || !strings.Contains(message, "no space left") {
			t.Errorf("status %d, %q", code, message)
		}
		return
	}
	name := putOldFile(t, dir)
	_, message, code := invoke(t, longIsotherm(name)...)
	if code != statusInput || message != "writing "+name+": no space left on device" {
		t.Errorf("status %d, %q", code, message)
	}
	survived(t, dir)
	// the calibration as well, which writes its model before it prints
	_, message, code = invoke(t, "calibrate", "--data", demo, "--folds", "none", "--out", name)
	if code == statusDone { // its model fits
		t.Fatal("the disk is large enough for a model: make it smaller")
	}
	if code != statusInput || !strings.Contains(message, "no space left") {
		t.Errorf("status %d, %q", code, message)
	}
	survived(t, dir)
}

// TestReadOnlyFolder writes into a folder that takes no files.
func TestReadOnlyFolder(t *testing.T) {
	dir, ok := tmpfs(t, "1m")
	if !ok {
	}
	name := putOldFile(t, dir)
	says := "permission denied"
	if ok {
		if err := syscall.Mount("", dir, "", syscall.MS_REMOUNT|syscall.MS_RDONLY, ""); err != nil {
			t.Fatal(err)
		}
		says = "read-only file system"
	} else if err := os.Chmod(dir, 0o555); err != nil {
		t.Fatal(err)
	}
	for _, out := range []string{name, filepath.Join(dir, "new.json")} {
		if _, message, code := invoke(t, longIsotherm(out)...); code != statusInput || message != "writing "+out+": "+says {
			t.Errorf("status %d, %q", code, message)
		}
	}
	survived(t, dir)
	if !ok {
		if err := os.Chmod(dir, 0o755); err != nil {
			t.Fatal(err)
		}
	}
}

// TestKilledWhileWriting builds the program and kills it once its temporary file is
// there, which no program can catch: the old file stays whole, and the next run
// replaces it.
func TestKilledWhileWriting(t *testing.T) {
	dir := t.TempDir()
	program := filepath.Join(t.TempDir(), "limsup")
	if out, err := exec.Command("go", "build", "-o", program, ".").CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, out)
	}
	name := putOldFile(t, dir)
	args := longIsotherm(name)
	for i := range args {
		if args[i] == "3000" {
			args[i] = "1000000"
		}
	}
	cmd := exec.Command(program, args...)
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	ended := make(chan error, 1)
	go func() { ended <- cmd.Wait() }()
	for found := false; !found; {
		select {
		case err := <-ended:
			t.Fatalf("the program ended (%v) before it could be killed", err)
		default:
		}
		parts, err := filepath.Glob(filepath.Join(dir, ".out.json.*.part"))
		if err != nil {
			t.Fatal(err)
		}
		found = len(parts) > 0
	}
	if err := cmd.Process.Kill(); err != nil {
		t.Fatal(err)
	}
	<-ended
	if s, ok := cmd.ProcessState.Sys().(syscall.WaitStatus); !ok || s.Signal() != syscall.SIGKILL {
		t.Fatalf("ended by itself: %v", cmd.ProcessState)
	}
	survived(t, dir, ".out.json.*.part")
	if out, err := exec.Command(program, longIsotherm(name)...).CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, out)
	}
	if b, err := os.ReadFile(name); err != nil || !strings.HasSuffix(string(b), "}\n") || strings.Contains(string(b), lastWeek) {
		t.Errorf("the new file: %d bytes, %v", len(b), err)
	}
}
