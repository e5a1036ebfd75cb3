package near

import (
	"os"
	"os/exec"
	"testing"
)

// Python returns a Python that has the modules, comma-separated as for import. Without one the test is skipped, or fails
// where PREPONDER_REFERENCES is set, as ./build.sh test does.
func Python(t *testing.T, modules string) string {
	t.Helper()
	for _, p := range []string{"python3", "/usr/bin/python3"} {
		if exec.Command(p, "-c", "import "+modules).Run() == nil {
			return p
		}
	}
	if os.Getenv("PREPONDER_REFERENCES") != "" {
		t.Fatalf("no Python has %s", modules)
	}
	t.Skipf("no Python has %s; ./build.sh test installs it", modules)
	return ""
}
