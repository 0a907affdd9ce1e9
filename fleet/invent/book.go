package invent

import (
	"bytes"
	"strconv"
	"time"
)

// book gathers the series of a case by file.
type book struct {
	times  []time.Time
	tables []*table // in the order of first use
}

type table struct {
	file    string
	columns []column
}

type column struct {
	name     string
	decimals int
	values   []float64
}

func newBook(times []time.Time) *book { return &book{times: times} }

// add puts a series on file and says where. The values may be more than the hours
// written.
func (b *book) add(file, name string, decimals int, values []float64) amount {
	var t *table
	for _, have := range b.tables {
		if have.file == file {
			t = have
		}
	}
	if t == nil {
		t = &table{file: file}
		b.tables = append(b.tables, t)
	}
	t.columns = append(t.columns, column{name, decimals, values})
	return amount{ref: file + ":" + name}
}

// csv is the content of one file: a time column, then one column a series.
func (b *book) csv(t *table) []byte {
	var out bytes.Buffer
	out.WriteString("time")
	for _, c := range t.columns {
		out.WriteByte(',')
		out.WriteString(c.name)
	}
	out.WriteByte('\n')
	line := make([]byte, 0, 256)
	for i, at := range b.times {
		line = at.AppendFormat(line[:0], time.RFC3339)
		for _, c := range t.columns {
			line = append(line, ',')
			line = strconv.AppendFloat(line, c.values[i], 'f', c.decimals, 64)
		}
		out.Write(append(line, '\n'))
	}
	return out.Bytes()
}
