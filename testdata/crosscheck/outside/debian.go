package outside

import (
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
)

// Packages makes sure that Debian packages are installed, and logs their versions. Test processes that run at the same time
// take turns.
func Packages(t testing.TB, names ...string) {
	t.Helper()
	lock, err := os.OpenFile(filepath.Join(os.TempDir(), "maskpair-crosscheck.lock"), os.O_CREATE|os.O_RDWR, 0o600)
	if err != nil {
		t.Fatal(err)
	}
	defer lock.Close()
	if err := syscall.Flock(int(lock.Fd()), syscall.LOCK_EX); err != nil {
		t.Fatal(err)
	}
	var missing []string
	for _, name := range names {
		if version(name) == "" {
			missing = append(missing, name)
		}
	}
	if len(missing) > 0 {
		install := append([]string{"install", "-y", "--no-install-recommends"}, missing...)
		if _, err := apt(install...); err != nil { // the lists of packages may be old, or not there yet
			if out, err := apt("update"); err != nil {
				t.Fatalf("apt-get update: %v\n%s", err, out)
			}
			if out, err := apt(install...); err != nil {
				t.Fatalf("apt-get %s: %v\n%s", strings.Join(install, " "), err, out)
			}
		}
	}
	for _, name := range names {
		t.Logf("judge: %s %s", name, version(name))
	}
}

func apt(args ...string) ([]byte, error) {
	cmd := exec.Command("apt-get", append([]string{"-q", "-o", "DPkg::Lock::Timeout=300"}, args...)...)
	cmd.Env = append(os.Environ(), "DEBIAN_FRONTEND=noninteractive")
	return cmd.CombinedOutput()
}

// version gives the version of an installed package, or nothing.
func version(name string) string {
	out, err := exec.Command("dpkg-query", "-W", "-f", "${db:Status-Status} ${Version}", name).Output()
	if v, ok := strings.CutPrefix(string(out), "installed "); err == nil && ok {
		return v
	}
	return ""
}
