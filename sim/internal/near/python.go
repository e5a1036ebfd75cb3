package near

import (
	"os"
	"os/exec"
	"testing"
)

// Python returns a Python that has the modules, comma-separated as for import. Without one it is Missing.
func Python(t *testing.T, modules string) string {
	t.Helper()
	for _, p := range []string{"python3", "/usr/bin/python3"} {
		if exec.Command(p, "-c", "import "+modules).Run() == nil {
			return p
		}
	}
	Missing(t, "a Python with "+modules)
	return ""
}

// Missing ends a test that needs what is not installed here. ./build.sh test installs it and sets PREPONDER_REFERENCES:
// there, and in CI, the test fails. Only a plain "go test" on a machine without it skips the test, since nothing could be
// checked.
func Missing(t *testing.T, what string) {
	t.Helper()
	if os.Getenv("PREPONDER_REFERENCES") != "" {
		t.Fatalf("%s is missing", what)
	}
	t.Skipf("%s is missing; ./build.sh test installs it", what)
}
