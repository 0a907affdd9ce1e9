package invent

import (
	"math"
	"math/rand/v2"
	"time"
)

// weather is what demand, wind, sun, rivers and heat have in common.
type weather struct {
	times       []time.Time
	yearDay     []int // 1 is New Year's Day
	latitudeDeg float64
	tempC       []float64
	smoothC     []float64 // temperature as buildings feel it
	cloud       []float64 // 0 clear to 1 overcast
	wind        []float64 // regional, standard normal
}

// makeWeather draws the weather of all hours; every series has a stream of its own.
func makeWeather(s streams, times []time.Time) *weather {
	n := len(times)
	w := &weather{times: times, latitudeDeg: uniform(s.of("latitude"), 52, 60)}
	synoptic, breeze := red(s.of("wind/synoptic"), n, 40), red(s.of("wind/breeze"), n, 6)
	front, sky := red(s.of("temperature"), n, 60), red(s.of("cloud"), n, 14)
	w.tempC, w.smoothC = make([]float64, n), make([]float64, n)
	w.cloud, w.wind = make([]float64, n), make([]float64, n)
	w.yearDay = make([]int, n)
	for i, t := range times {
		w.yearDay[i] = t.YearDay()
		w.wind[i] = math.Sqrt(0.85)*synoptic[i] + math.Sqrt(0.15)*breeze[i]
		w.cloud[i] = normalShare(0.35 + 0.85*sky[i] + 0.3*synoptic[i])
		day := math.Cos(2 * math.Pi * (hourOfDay(t) - 15) / 24)
		// Wind brings mild air in winter and cool air in summer.
		w.tempC[i] = 8.5 - 6.5*winter(t) + 2.5*day*(1-0.5*winter(t)) + 3*front[i] + 0.8*winter(t)*synoptic[i]
		w.smoothC[i] = w.tempC[i]
		if i > 0 {
			w.smoothC[i] = w.smoothC[i-1] + (w.tempC[i]-w.smoothC[i-1])/18
		}
	}
	return w
}

// winter is 1 in the middle of January and −1 in the middle of July.
func winter(t time.Time) float64 {
	return math.Cos(2 * math.Pi * (dayOfYear(t) - 15) / 365.25)
}

func dayOfYear(t time.Time) float64 { return float64(t.YearDay()) + hourOfDay(t)/24 }

// hourOfDay is the middle of the hour that starts at t, in hours after midnight UTC.
func hourOfDay(t time.Time) float64 { return float64(t.Hour()) + 0.5 }

// red is a first-order autoregressive series of mean 0 and variance 1 whose memory
// fades over memoryH hours.
func red(r *rand.Rand, n int, memoryH float64) []float64 {
	keep := math.Exp(-1 / memoryH)
	fresh := math.Sqrt(1 - keep*keep)
	x := make([]float64, n)
	last := r.NormFloat64()
	for i := range x {
		last = keep*last + fresh*r.NormFloat64()
		x[i] = last
	}
	return x
}

// normalShare is the standard normal distribution function.
func normalShare(x float64) float64 { return 0.5 * math.Erfc(-x/math.Sqrt2) }
