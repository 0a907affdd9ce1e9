package report

import (
	"evenkeel/study/size"
	"io"
)

func sizeJSON(w io.Writer, s *size.Study, gap float64) error { return nil }
