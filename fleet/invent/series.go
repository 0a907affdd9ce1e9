package invent

import (
	"math"
	"math/rand/v2"
	"time"
)

// Hourly demand over the day as a share of the day's highest hour: workday, Saturday, Sunday.
var dayShape = [3][24]float64{
	{.66, .63, .62, .61, .62, .67, .77, .88, .94, .95, .94, .93, .93, .92, .91, .91, .94, .99, 1, .98, .94, .88, .80, .72},
	{.66, .62, .60, .59, .59, .61, .65, .71, .78, .83, .85, .86, .86, .84, .83, .83, .86, .91, .93, .91, .87, .82, .76, .70},
	{.64, .60, .58, .57, .56, .57, .59, .63, .69, .75, .79, .82, .83, .81, .79, .79, .83, .89, .92, .91, .88, .82, .75, .68},
}

// demandShares is demand as a share of the highest hour among the first norm hours.
func demandShares(s streams, w *weather, norm int) []float64 {
	n := len(w.times)
	habit, jitter := red(s.of("demand/habit"), n, 30), red(s.of("demand/jitter"), n, 2)
	d := make([]float64, n)
	for i, t := range w.times {
		base := dayShape[dayType(t)][t.Hour()]
		heat := 0.015 * math.Max(0, 16-w.smoothC[i]) * (0.7 + 0.3*base)
		cool := 0.006 * math.Max(0, w.tempC[i]-21)
		dark := 0.045 * math.Max(0, winter(t)) * math.Exp(-math.Pow((hourOfDay(t)-18)/2.2, 2))
		d[i] = (0.66*base + heat + cool + dark) * (1 + 0.012*habit[i] + 0.006*jitter[i])
	}
	peak := 0.0
	for _, x := range d[:norm] {
		peak = math.Max(peak, x)
	}
	for i := range d {
		d[i] /= peak
	}
	return d
}

// dayType is 0 for a workday, 1 for a Saturday, 2 for a Sunday or one of the days
// around Christmas and New Year that pass like one.
func dayType(t time.Time) int {
	month, day := t.Month(), t.Day()
	switch {
	case t.Weekday() == time.Sunday,
		month == time.December && (day == 25 || day == 26),
		month == time.January && day == 1:
		return 2
	case t.Weekday() == time.Saturday:
		return 1
	}
	return 0
}

// windShares is the output of one farm as a share of its capacity. Farms share the
// regional wind and have some of their own. site scales the wind speed: 1 is fair,
// 1.15 a very good site.
func windShares(r *rand.Rand, w *weather, site float64) []float64 {
	n := len(w.times)
	own := red(r, n, 7)
	out := make([]float64, n)
	for i, t := range w.times {
		x := math.Sqrt(0.8)*w.wind[i] + math.Sqrt(0.2)*own[i]
		afternoon := 0.35 * (1 - winter(t)) / 2 * math.Cos(2*math.Pi*(hourOfDay(t)-15)/24)
		scale := site * (9.4 + 1.3*winter(t) + afternoon)
		// Weibull wind speeds with shape 2.1, by way of the normal quantile.
		speed := scale * math.Pow(-math.Log(normalShare(-x)), 1/2.1)
		out[i] = 0.96 * powerCurve(speed)
	}
	return out
}

// powerCurve is the output of a farm as a share of its rating at a wind speed in m/s:
// cubic between 3 and 12.5, and off between 24 and 29, turbine by turbine.
func powerCurve(v float64) float64 {
	const in, rated = 3.0, 12.5
	rise := (v*v*v - in*in*in) / (rated*rated*rated - in*in*in)
	return clamp(rise, 0, 1) * clamp((29-v)/5, 0, 1)
}

// solarShares is the output of photovoltaics as a share of their capacity: the height
// of the sun and the cloud in between.
func solarShares(r *rand.Rand, w *weather) []float64 {
	own := red(r, len(w.times), 3)
	lat := w.latitudeDeg * math.Pi / 180
	out := make([]float64, len(w.times))
	for i, t := range w.times {
		decl := 23.45 * math.Pi / 180 * math.Sin(2*math.Pi*(284+dayOfYear(t))/365.25)
		angle := 2 * math.Pi * (hourOfDay(t) - 12) / 24
		height := math.Sin(lat)*math.Sin(decl) + math.Cos(lat)*math.Cos(decl)*math.Cos(angle)
		if height <= 0 {
			continue
		}
		clear := math.Pow(height, 0.8) * math.Exp(-0.12/(height+0.05))
		cloud := clamp(w.cloud[i]+0.08*own[i], 0, 1)
		out[i] = clamp(1.05*clear*(1-0.78*cloud*cloud), 0, 0.9)
	}
	return out
}

// riverShares is what a run-of-river plant can make, as a share of its capacity: snow
// melt in spring, rain in autumn and winter, a dry late summer.
func riverShares(r *rand.Rand, w *weather) []float64 {
	flow, shower := red(r, len(w.times), 260), red(r, len(w.times), 40)
	out := make([]float64, len(w.times))
	for i, t := range w.times {
		melt := math.Exp(-math.Pow((dayOfYear(t)-130)/28, 2))
		out[i] = clamp(0.44+0.13*winter(t)+0.33*melt+0.17*flow[i]+0.05*shower[i], 0.15, 1)
	}
	return out
}

// heating tells whether a heat network is in season.
func heating(t time.Time) bool { return t.YearDay() <= 130 || t.YearDay() >= 275 }

// heatShares is the output that a heat network asks of its plant, between low and 1, in
// season; 0 out of season.
func heatShares(w *weather, low float64) []float64 {
	out := make([]float64, len(w.times))
	for i, t := range w.times {
		if !heating(t) {
			continue
		}
		morning := 0.05 * math.Cos(2*math.Pi*(hourOfDay(t)-7)/12)
		out[i] = clamp(low+(0.9-low)*((16-w.smoothC[i])/20+morning), low, 0.92)
	}
	return out
}

// importPrices is the price at the far end of a link: high by day and in winter, low when
// it blows.
func importPrices(r *rand.Rand, w *weather, level float64) []float64 {
	mood, jitter := red(r, len(w.times), 120), red(r, len(w.times), 3)
	out := make([]float64, len(w.times))
	for i, t := range w.times {
		day := dayShape[dayType(t)][t.Hour()] - 0.8
		p := level * (1 + 0.75*day + 0.1*winter(t) - 0.12*w.wind[i] + 0.12*mood[i] + 0.04*jitter[i])
		out[i] = math.Max(p, 2)
	}
	return out
}

// embeddedShares is the net feed-in of a busbar with small plants behind it as a share of
// their capacity: some heat-led, some photovoltaic.
func embeddedShares(s streams, w *weather) []float64 {
	heat, sun := heatShares(w, 0.4), solarShares(s.of("embedded/sun"), w)
	wiggle := red(s.of("embedded/wiggle"), len(w.times), 10)
	out := make([]float64, len(w.times))
	for i := range out {
		out[i] = clamp(0.18+0.5*heat[i]+0.5*sun[i]+0.03*wiggle[i], 0.05, 1)
	}
	return out
}
