package sim_test

import (
	"encoding/json"
	"os/exec"
	"sort"
	"strings"
	"testing"
)

// allowed says who may import whom of ours: architecture as data. Changing it is a design decision with a commit of its
// own; a line that nothing uses fails too. "engine" marks what may bring in Ebiten, "browser" what may use syscall/js.
const allowed = `
sim/internal/exact      <-
sim/internal/near       <-
sim/internal/gauss      <-
sim/internal/double     <- sim/internal/exact
sim/internal/sums       <-
sim/law                 <- sim/internal/double sim/internal/exact sim/internal/gauss
sim/bose                <- sim/internal/double sim/internal/gauss sim/law
sim/growth              <- sim/internal/exact sim/internal/sums sim/law
sim/share               <-
sim/standing            <- sim/bose
sim/evidence            <- sim/bose sim/growth sim/internal/exact sim/internal/sums sim/law sim/share sim/standing
sim/outlook             <- sim/evidence sim/growth sim/internal/exact sim/share
sim/casebook            <- sim/evidence sim/growth sim/law
sim/wire                <-
sim/service             <- sim/bose sim/casebook sim/evidence sim/growth sim/law sim/outlook sim/share sim/standing sim/wire
sim/cmd/preponder       <- sim/evidence sim/service sim/wire
render/scene            <-
render/raster           <- render/scene
render/view             <- render/raster render/scene                            engine
wasm/engine             <- render/raster render/scene sim/service sim/wire       browser
wasm/stage              <- render/scene render/view sim/wire                     browser engine
sim                     <-
`

func TestImports(t *testing.T) {
	cmd := exec.Command("go", "list", "-json=ImportPath,Imports", "preponder/...")
	cmd.Env = append(cmd.Environ(), "GOOS=js", "GOARCH=wasm")
	out, err := cmd.Output()
	if err != nil {
		t.Fatal(err)
	}
	type may struct {
		imports         map[string]bool
		browser, engine bool
	}
	rules := map[string]*may{}
	for _, line := range strings.Split(strings.TrimSpace(allowed), "\n") {
		name, rest, _ := strings.Cut(line, "<-")
		m := &may{imports: map[string]bool{}}
		for _, word := range strings.Fields(rest) {
			switch word {
			case "browser":
				m.browser = true
			case "engine":
				m.engine = true
			default:
				m.imports[word] = false
			}
		}
		rules[strings.TrimSpace(name)] = m
	}
	d := json.NewDecoder(strings.NewReader(string(out)))
	for d.More() {
		var p struct {
			ImportPath string
			Imports    []string
		}
		if err := d.Decode(&p); err != nil {
			t.Fatal(err)
		}
		name := strings.TrimPrefix(p.ImportPath, "preponder/")
		m := rules[name]
		if m == nil {
			t.Errorf("%s stands in no line of the list", name)
			continue
		}
		for _, i := range p.Imports {
			ours, isOurs := strings.CutPrefix(i, "preponder/")
			_, ok := m.imports[ours]
			switch {
			case isOurs && !ok:
				t.Errorf("%s may not import %s", name, ours)
			case isOurs:
				m.imports[ours] = true
			case i == "syscall/js" && !m.browser:
				t.Errorf("%s may not use syscall/js", name)
			case strings.HasPrefix(i, "github.com/hajimehoshi/ebiten") && !m.engine:
				t.Errorf("%s may not bring in Ebiten", name)
			case strings.HasPrefix(name, "sim") && (i == "math/rand" || i == "math/rand/v2"):
				t.Errorf("%s may not use global chance", name)
			}
		}
		delete(rules, name)
		var unused []string
		for i, used := range m.imports {
			if !used {
				unused = append(unused, i)
			}
		}
		sort.Strings(unused)
		if len(unused) > 0 {
			t.Errorf("%s does not import %s any more", name, strings.Join(unused, ", "))
		}
	}
	for name := range rules {
		t.Errorf("%s is gone", name)
	}
}
