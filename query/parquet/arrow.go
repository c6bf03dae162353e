package parquet

import (
	"encoding/base64"
	"encoding/binary"

	flatbuffers "github.com/google/flatbuffers/go"
	pq "github.com/parquet-go/parquet-go"
	"github.com/parquet-go/parquet-go/format"
)

// arrowSchema is the Arrow schema of a file, with units in the metadata of fields, as an
// encapsulated message in base64: the form in which Parquet files carry it. Readers of Arrow
// take from it what Parquet itself cannot say, that words are dictionaries among it.
//
// Numbers of tables' slots, unions and enums are those of Message.fbs and Schema.fbs of the
// Apache Arrow columnar format, version 5 of the metadata.
func arrowSchema(schema *pq.Schema, units map[string]string) string {
	s := &schemaBuilder{b: flatbuffers.NewBuilder(4096), units: units}
	var fields []flatbuffers.UOffsetT
	for _, f := range schema.Fields() {
		fields = append(fields, s.field(f.Name(), f.Name(), f))
	}
	list := s.vector(fields)
	s.b.StartObject(4) // Schema; little endian is the default
	s.b.PrependUOffsetTSlot(1, list, 0)
	header := s.b.EndObject()
	s.b.StartObject(5) // Message
	s.b.PrependInt16Slot(0, metadataV5, 0)
	s.b.PrependByteSlot(1, headerSchema, 0)
	s.b.PrependUOffsetTSlot(2, header, 0)
	s.b.Finish(s.b.EndObject())
	return base64.StdEncoding.EncodeToString(encapsulated(s.b.FinishedBytes()))
}

const (
	metadataV5   = 4
	headerSchema = 1
)

// encapsulated puts a mark and the length before a message, which it pads to eight bytes.
func encapsulated(message []byte) []byte {
	padded := (len(message) + 7) / 8 * 8
	out := binary.LittleEndian.AppendUint32([]byte{0xff, 0xff, 0xff, 0xff}, uint32(padded))
	return append(append(out, message...), make([]byte, padded-len(message))...)
}

// The types of fields that are written here.
const (
	typeInt       = 2
	typeFloat     = 3
	typeUTF8      = 5
	typeTimestamp = 10
	typeList      = 12
	typeStruct    = 13
)

const (
	precisionDouble  = 2
	unitMicroseconds = 2
)

type schemaBuilder struct {
	b            *flatbuffers.Builder
	units        map[string]string // by column
	dictionaries int64
}

func (s *schemaBuilder) vector(offsets []flatbuffers.UOffsetT) flatbuffers.UOffsetT {
	s.b.StartVector(4, len(offsets), 4)
	for i := len(offsets) - 1; i >= 0; i-- {
		s.b.PrependUOffsetT(offsets[i])
	}
	return s.b.EndVector(len(offsets))
}

// field writes a column, or what is inside one; column is its name with those around it.
func (s *schemaBuilder) field(name, column string, node pq.Node) flatbuffers.UOffsetT {
	var children []flatbuffers.UOffsetT
	switch {
	case isList(node):
		element := node.Fields()[0].Fields()[0] // of the group "list"
		children = append(children, s.field(element.Name(), column, element))
	case !node.Leaf():
		for _, f := range node.Fields() {
			children = append(children, s.field(f.Name(), column+"."+f.Name(), f))
		}
	}
	kind, of := s.kind(node)
	dictionary := flatbuffers.UOffsetT(0)
	if name == column { // not inside another, where some readers cannot make dictionaries of several groups
		dictionary = s.dictionary(node)
	}
	metadata := s.metadata(column, node)
	inside, text := s.vector(children), s.b.CreateString(name)
	s.b.StartObject(7) // Field
	s.b.PrependUOffsetTSlot(0, text, 0)
	s.b.PrependBoolSlot(1, node.Optional(), false)
	s.b.PrependByteSlot(2, kind, 0)
	s.b.PrependUOffsetTSlot(3, of, 0)
	s.b.PrependUOffsetTSlot(4, dictionary, 0)
	s.b.PrependUOffsetTSlot(5, inside, 0)
	s.b.PrependUOffsetTSlot(6, metadata, 0)
	return s.b.EndObject()
}

func isList(node pq.Node) bool {
	_, ok := logical(node).(*format.ListType)
	return ok
}

// kind writes the type, and returns which of the union it is.
func (s *schemaBuilder) kind(node pq.Node) (kind byte, of flatbuffers.UOffsetT) {
	switch {
	case isList(node):
		return typeList, s.empty()
	case !node.Leaf():
		return typeStruct, s.empty()
	case node.Type().Kind() == pq.Double:
		s.b.StartObject(1)
		s.b.PrependInt16Slot(0, precisionDouble, 0)
		return typeFloat, s.b.EndObject()
	case node.Type().Kind() == pq.Int64 && isTime(node):
		zone := s.b.CreateString("UTC")
		s.b.StartObject(2)
		s.b.PrependInt16Slot(0, unitMicroseconds, 0)
		s.b.PrependUOffsetTSlot(1, zone, 0)
		return typeTimestamp, s.b.EndObject()
	case node.Type().Kind() == pq.Int64:
		return typeInt, s.integer(64)
	case node.Type().Kind() == pq.ByteArray:
		return typeUTF8, s.empty()
	}
	panic("parquet: no Arrow type for " + node.Type().String())
}

func isTime(node pq.Node) bool {
	_, ok := logical(node).(*format.TimestampType)
	return ok
}

func logical(node pq.Node) format.LogicalTypeValue {
	if t := node.Type().LogicalType(); t != nil {
		return t.Value
	}
	return nil
}

func (s *schemaBuilder) empty() flatbuffers.UOffsetT {
	s.b.StartObject(0)
	return s.b.EndObject()
}

func (s *schemaBuilder) integer(bits int32) flatbuffers.UOffsetT {
	s.b.StartObject(2)
	s.b.PrependInt32Slot(0, bits, 0)
	s.b.PrependBoolSlot(1, true, false) // signed
	return s.b.EndObject()
}

// dictionary writes that words are a dictionary, 0 where they are not.
func (s *schemaBuilder) dictionary(node pq.Node) flatbuffers.UOffsetT {
	if !node.Leaf() || node.Type().Kind() != pq.ByteArray || node.Encoding() != &pq.RLEDictionary {
		return 0
	}
	index := s.integer(32)
	id := s.dictionaries
	s.dictionaries++
	s.b.StartObject(4)
	s.b.PrependInt64Slot(0, id, 0)
	s.b.PrependUOffsetTSlot(1, index, 0)
	return s.b.EndObject()
}

// metadata writes the unit of a column, 0 where it has none.
func (s *schemaBuilder) metadata(column string, node pq.Node) flatbuffers.UOffsetT {
	unit, ok := s.units[column]
	if !ok || !node.Leaf() {
		return 0
	}
	key, value := s.b.CreateString(UnitKey), s.b.CreateString(unit)
	s.b.StartObject(2)
	s.b.PrependUOffsetTSlot(0, key, 0)
	s.b.PrependUOffsetTSlot(1, value, 0)
	return s.vector([]flatbuffers.UOffsetT{s.b.EndObject()})
}
