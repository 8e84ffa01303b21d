package main

import (
	"bytes"
	"crypto/sha256"
	"encoding/binary"
	"encoding/csv"
	"flag"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"
)

var long = flag.Bool("long", false, "run what takes long, and write the record of TestKills to testdata/records")

// familyStudy has a family of so many members, which a table holds. Its traverse is
// familyTraverse.
func familyStudy(count int) string {
	return fmt.Sprintf(`title = "a family"
seed = 5
[[threshold]]
name = "hot"
temperature = "740 C"
[limits]
life = { longest = "10 kyr" }
[[family]]
name = "drawn"
draw = { method = "halton", count = %d }
legs = [ { name = "store", hold = "{store}", for = "{wait}" } ]
[family.vary]
store = { from = "620 C", to = "780 C" }
wait = { from = "1 yr", to = "20 kyr", spread = "log" }
[[crystal]]
name = "Q"
mineral = "quartz"
shape = "slab"
zones = [{ name = "core", width = "40 um" }, { name = "mantle", width = "20 um" }]
[[crystal.element]]
name = "Ti"
law = "quartz-ti-cherniak2007"
start = { zones = ["free", "free"], edge = "0 um" }
rim = { held = "mantle" }
traverse = { file = "ti.csv", position = "x [um]", zero = "centre", value = "Ti [ppm]", error = "2 ppm", spot = "0.8 um fwhm" }
`, count)
}

const familyTraverse = "x [um],Ti [ppm]\n20,98\n26,101\n30,99\n34,97\n36,92\n38,86\n39,79\n40,74\n41,69\n42,63\n44,57\n46,53\n50,51\n54,48\n"

// Runs that are killed: their number, the seed of their moments, and the members of the
// family, which take a run about a second.
const (
	kills       = 1000
	killSeed    = 7
	killMembers = 50_000
)

// killRecord is where the record of all kills lies.
const killRecord = root + "/testdata/records/kills.csv"

var killColumns = []string{"commit", "seed", "kill", "moment", "members_kept", "results"}

const killPreamble = `# Runs of bankfire weigh over a family of 50000 members that were killed (SIGKILL) and resumed. Written by
# go test ./cmd/bankfire -run TestKills -long; a run that is broken off goes on where the rows end. The moment of a
# kill depends on seed and kill alone, in parts of what a run takes, with the writing of its results. Members kept are
# those that the resumed run found; whole: the results were there already. Results are the same if no byte of any file but
# run.log differs from those of a run that was never killed.
`

// momentOf is when run k is killed, in parts of what a whole run takes.
func momentOf(k int) float64 {
	return 1.05 * rand.New(rand.NewPCG(killSeed, uint64(k))).Float64()
}

// killing is a study to kill runs of.
type killing struct {
	dir  string
	want map[string][32]byte // hashes of the results of a run that was not killed
	took time.Duration       // by such a run
}

func newKilling(t *testing.T) *killing {
	t.Helper()
	k := &killing{dir: t.TempDir()}
	plantStudy(t, filepath.Join(k.dir, "study.toml"), familyStudy(killMembers), familyTraverse)
	k.want = k.whole(t, "want")
	for range 3 {
		k.measure(t)
	}
	return k
}

// measure measures how long a run takes, the shortest of several.
func (k *killing) measure(t *testing.T) {
	t.Helper()
	began := time.Now()
	k.whole(t, "measured")
	if took := time.Since(began); k.took == 0 || took < k.took {
		k.took = took
	}
	os.RemoveAll(filepath.Join(k.dir, "measured"))
}

// whole is a run that is not killed.
func (k *killing) whole(t *testing.T, out string) map[string][32]byte {
	t.Helper()
	if text, err := k.command(out).CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, text)
	}
	return hashes(t, filepath.Join(k.dir, out))
}

func (k *killing) command(out string, more ...string) *exec.Cmd {
	return inFolder(k.dir, append([]string{"weigh", "study.toml", "--out", out, "--keep", "all"}, more...)...)
}

// inFolder is the program, to be run in a folder.
func inFolder(dir string, args ...string) *exec.Cmd {
	c := exec.Command("bankfire", args...)
	c.Dir = dir
	return c
}

// hashes are those of the files of a folder of results, all but run.log.
func hashes(t *testing.T, dir string) map[string][32]byte {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	all := map[string][32]byte{}
	for _, e := range entries {
		if e.Name() == "run.log" || strings.HasPrefix(e.Name(), ".bankfire-unfinished-") {
			continue
		}
		data, err := os.ReadFile(filepath.Join(dir, e.Name()))
		if err != nil {
			t.Fatal(err)
		}
		all[e.Name()] = sha256.Sum256(data)
	}
	return all
}

var keptMembers = regexp.MustCompile(`: (\d+) of \d+ members are there already`)

// kill kills run n and resumes it. It returns how many members the second run found, or
// "whole" if there were results, and whether its results are the same as others.
func (k *killing) kill(t *testing.T, n int) (kept, same string) {
	t.Helper()
	out := filepath.Join(k.dir, "out")
	os.RemoveAll(out)
	os.RemoveAll(out + partsSuffix)
	removeLeftovers(t, k.dir)
	c := k.command("out")
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	time.Sleep(time.Duration(momentOf(n) * float64(k.took)))
	c.Process.Kill() // it may have ended
	c.Wait()
	if _, err := os.Stat(filepath.Join(out, "summary.json")); err == nil {
		return "whole", k.compare(t, out)
	}
	text, err := k.command("out", "--resume").CombinedOutput()
	if err != nil {
		t.Fatalf("kill %d: %v\n%s", n, err, text)
	}
	if _, err := os.Stat(out + partsSuffix); err == nil {
		return kept, "parts left"
	}
	kept = "0"
	if found := keptMembers.FindSubmatch(text); found != nil {
		kept = string(found[1])
	}
	return kept, k.compare(t, out)
}

func (k *killing) compare(t *testing.T, out string) string {
	t.Helper()
	got := hashes(t, out)
	for name, want := range k.want {
		if got[name] != want {
			return name + " differs"
		}
	}
	if len(got) != len(k.want) {
		return "more files"
	}
	return "same"
}

// killRow is the row of the record.
func (k *killing) row(t *testing.T, commit string, n int) []string {
	t.Helper()
	kept, same := k.kill(t, n)
	return []string{commit, strconv.Itoa(killSeed), strconv.Itoa(n), strconv.FormatFloat(momentOf(n), 'f', 4, 64), kept, same}
}

// TestKills kills runs in full and writes the record, going on where it ends.
func TestKills(t *testing.T) {
	if !*long {
		t.Skip("run in full with -long")
	}
	commit := cleanCommit(t)
	rows := killRows(t)
	k := newKilling(t)
	for n := len(rows); n < kills; n++ {
		if n%20 == 0 { // the machine may be busier now
			k.took = 0
			k.measure(t)
		}
		row := k.row(t, commit, n)
		if row[5] != "same" {
			t.Errorf("%v", row)
		}
		rows = append(rows, row)
		writeKills(t, rows)
	}
}

// leastKills is how many kills the record has at least.
const leastKills = 500

// TestKillsReplay runs rows of the record again that a hash of it chooses, and checks that
// all are of this test and well.
func TestKillsReplay(t *testing.T) {
	content, err := os.ReadFile(killRecord)
	if err != nil {
		t.Fatal(err)
	}
	rows := killRows(t)
	if len(rows) < leastKills || !strings.HasPrefix(string(content), killPreamble+strings.Join(killColumns, ",")+"\n") {
		t.Fatalf("%d rows, want at least %d, with the head of this test", len(rows), leastKills)
	}
	for n, row := range rows {
		want := []string{row[0], strconv.Itoa(killSeed), strconv.Itoa(n), strconv.FormatFloat(momentOf(n), 'f', 4, 64), row[4], "same"}
		if !slices.Equal(row, want) {
			t.Errorf("row %v, want %v", row, want)
		}
	}
	k := newKilling(t)
	hash := sha256.Sum256(content)
	for i := range 3 {
		n := int(binary.BigEndian.Uint64(hash[8*i:]) % uint64(len(rows)))
		if row := k.row(t, "", n); row[5] != "same" {
			t.Errorf("%v", row)
		}
	}
}

// killRows reads the record, which need not be there.
func killRows(t *testing.T) [][]string {
	t.Helper()
	content, _ := os.ReadFile(killRecord)
	r := csv.NewReader(bytes.NewReader(content))
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows[min(1, len(rows)):]
}

func writeKills(t *testing.T, rows [][]string) {
	t.Helper()
	out := bytes.NewBufferString(killPreamble)
	w := csv.NewWriter(out)
	w.Write(killColumns)
	w.WriteAll(rows)
	if err := os.WriteFile(killRecord, out.Bytes(), 0o666); err != nil {
		t.Fatal(err)
	}
}

// cleanCommit returns the commit that a record rests on. It fails the test where the code
// is not that of the commit.
func cleanCommit(t *testing.T) string {
	t.Helper()
	changed, err := exec.Command("git", "status", "--porcelain", "--", root, ":!"+root+"/testdata/records").Output()
	if err != nil || len(changed) > 0 {
		t.Fatalf("commit first, so that the record can say what it rests on: %v\n%s", err, changed)
	}
	hash, err := exec.Command("git", "rev-parse", "--short=12", "HEAD").Output()
	if err != nil {
		t.Fatal(err)
	}
	return strings.TrimSpace(string(hash))
}
