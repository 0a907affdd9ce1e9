package report

import (
	"evenkeel/study/worth"
)

func worthPricesFigure(r *worth.Result, o WorthOptions) figure { return figure{} }
func exchangeFigure(r *worth.Result, x *worth.Exchange) figure { return figure{} }
func productFigure(r *worth.Result, o WorthOptions) figure { return figure{} }
