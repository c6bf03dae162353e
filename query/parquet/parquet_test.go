package parquet

import (
	"bytes"
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	pq "github.com/parquet-go/parquet-go"
)

type inside struct {
	Word string  `parquet:"word,dict"`
	X    float64 `parquet:"x_m" unit:"m"`
}

type row struct {
	Name   string     `parquet:"name"`
	Kind   *string    `parquet:"kind,dict"`
	At     *time.Time `parquet:"at,timestamp(microsecond)"`
	X      float64    `parquet:"x_s" unit:"s"`
	Y      *float64   `parquet:"y_m_s2" unit:"m/s²"`
	N      *int       `parquet:"n"`
	Words  []string   `parquet:"words,list"`
	Things []inside   `parquet:"things,list"`
}

func ptr[T any](x T) *T { return &x }

var rows = []row{
	{Name: "plain", Kind: ptr("a"), At: ptr(time.Date(2024, 2, 3, 4, 5, 6, 789012000, time.UTC)), X: math.Pi, Y: ptr(5e-324), N: ptr(7),
		Words: []string{"one", "two"}, Things: []inside{{"p", 1}, {"q", -0.5}}},
	{Name: "lacks all", Words: []string{}, Things: []inside{}},
	{Name: "hostile \"'\n\r\t,;=1+1 \U0001F30B é", Kind: ptr(""), At: ptr(time.Date(1893, 1, 1, 0, 0, 0, 0, time.UTC)), X: math.Copysign(0, -1), Y: ptr(math.MaxFloat64),
		Words: []string{"", "\n"}, Things: []inside{{"", 0}}},
}

func write(t *testing.T, head Head, groups ...[]row) []byte {
	t.Helper()
	var b bytes.Buffer
	w := NewWriter[row](&b, head)
	for _, rows := range groups {
		if err := w.Write(rows); err != nil {
			t.Fatal(err)
		}
		if err := w.EndGroup(); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

var head = Head{Program: "program", Version: "1.2.3", Table: "things", SortedBy: []string{"x_s", "name"}, Properties: []Property{{"caution", "care"}, {"run", "7"}}}

func TestRowsComeBack(t *testing.T) {
	text := write(t, head, rows[:2], rows[2:])
	got, err := pq.Read[row](bytes.NewReader(text), int64(len(text)))
	if err != nil {
		t.Fatal(err)
	}
	if len(got) != len(rows) {
		t.Fatalf("%d rows, want %d", len(got), len(rows))
	}
	for i := range rows {
		if math.Float64bits(got[i].X) != math.Float64bits(rows[i].X) {
			t.Errorf("row %d: %v, want %v", i, got[i].X, rows[i].X)
		}
		if len(got[i].Words) == 0 { // no list and an empty one are the same to the reader
			got[i].Words, got[i].Things = []string{}, []inside{}
		}
		if !reflect.DeepEqual(got[i], rows[i]) {
			t.Errorf("row %d: %+v, want %+v", i, got[i], rows[i])
		}
	}
}

func TestFilesSayWhatTheyHold(t *testing.T) {
	text := write(t, head, rows[:2], rows[2:])
	f, err := pq.OpenFile(bytes.NewReader(text), int64(len(text)))
	if err != nil {
		t.Fatal(err)
	}
	for key, want := range map[string]string{"caution": "care", "run": "7", "unit.x_s": "s", "unit.y_m_s2": "m/s²", "unit.things.x_m": "m"} {
		if got, _ := f.Lookup(key); got != want {
			t.Errorf("%s is %q, want %q", key, got, want)
		}
	}
	if by := f.Metadata().CreatedBy; !strings.HasPrefix(by, "program version 1.2.3") {
		t.Errorf("created by %q", by)
	}
	if name := f.Metadata().Schema[0].Name; name != "things" {
		t.Errorf("the schema is called %q", name)
	}
	groups := f.Metadata().RowGroups
	if len(groups) != 2 || groups[0].NumRows != 2 {
		t.Fatalf("%d groups", len(groups))
	}
	for i, c := range groups[0].Columns {
		if c.MetaData.Codec.String() != "ZSTD" {
			t.Errorf("column %d is packed by %s", i, c.MetaData.Codec)
		}
	}
	var sorted []int32
	for _, c := range groups[1].SortingColumns {
		sorted = append(sorted, c.ColumnIdx)
	}
	if !slices.Equal(sorted, []int32{3, 0}) {
		t.Errorf("sorted by columns %v, want x_s and name", sorted)
	}
}

func TestEqualRowsMakeEqualBytes(t *testing.T) {
	first := write(t, head, rows)
	for range 3 {
		if !bytes.Equal(first, write(t, head, rows)) {
			t.Fatal("other bytes of the same rows")
		}
	}
}

func TestClean(t *testing.T) {
	of := []row{{Name: "a\xffb", Kind: ptr("\xc3"), Words: []string{"\x80", "é"}, Things: []inside{{Word: "x\xfe\xfd"}}}}
	Clean(of)
	want := []row{{Name: "a\uFFFDb", Kind: ptr("\uFFFD"), Words: []string{"\uFFFD", "é"}, Things: []inside{{Word: "x\uFFFD"}}}}
	if !reflect.DeepEqual(of, want) {
		t.Errorf("%+v, want %+v", of, want)
	}
}
