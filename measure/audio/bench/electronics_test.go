package bench

import (
	"math"
	"math/cmplx"
	"testing"
)

// A sine of full scale has its harmonics at the levels given, relative to its
// fundamental; at a tenth of it they are at A·h₂ and A²·h₃ over 1 + 3h₃.
func TestHarmonics(t *testing.T) {
	const n, periods = 48000, 500
	for _, h := range [][2]float64{{0.002, 0.001}, {0.1, 0.05}, {0, 0.02}, {0.02, 0}, {-0.1, -0.02}} {
		b := open(t, Config{SpeedOfSound: 343, Source: Source{Second: h[0], Third: h[1]}, Capsule: plain().Capsule})
		for _, amplitude := range []float64{1, 0.1} {
			// The excitation fills the transform, so that it has no ends.
			p := b.play(sine(n, periods, amplitude), 48000, n)
			level := func(m int) float64 {
				return real(p.spectrum[m*periods] / p.spectrum[periods] * cmplx.Rect(1, math.Pi/2*float64(m-1)))
			}
			second, third := level(2), level(3)
			loss := 1.0 // of the fundamental
			if amplitude < 1 {
				c3 := -4 * h[1] / (1 + 3*h[1])
				loss = (1 + 0.75*c3*amplitude*amplitude) * (1 + 3*h[1]) / amplitude
			}
			near(t, "second", math.Abs(second)*loss, math.Abs(h[0]), 1e-7)
			third *= loss
			if amplitude < 1 {
				third /= amplitude
			}
			near(t, "third", math.Abs(third), math.Abs(h[1]), 1e-6)
			near(t, "fourth", math.Abs(level(4)), 0, 1e-7)
		}
	}
}

// What the motor makes above half the sample rate does not come back below it: the
// harmonics of 15 kHz would at 18 and 3 kHz.
func TestNothingIsFoldedBack(t *testing.T) {
	const n = 48000
	c := plain()
	c.Source.Second, c.Source.Third = 0.1, 0.1
	p := open(t, c).play(sine(n, 15000, 1), 48000, n)
	for _, f := range []int{18000, 3000} {
		near(t, "folded back", cmplx.Abs(p.spectrum[f])/cmplx.Abs(p.spectrum[15000]), 0, 1e-7)
	}
}

// Noise is white, of the rms given, to four of its standard errors.
func TestNoise(t *testing.T) {
	const n = 96000
	c := plain()
	c.Noise = 1e-3
	x := record(t, open(t, c), request(make([]float32, n), 0.03)).Mic
	near(t, "rms", rms(x)/1e-3, 1, 4/math.Sqrt(2*n))
	var sum, next float64
	for i := range n - 1 {
		sum += float64(x[i])
		next += float64(x[i]) * float64(x[i+1])
	}
	near(t, "mean", sum/n/1e-3, 0, 4/math.Sqrt(n))
	near(t, "neighbours", next/n/1e-6, 0, 4/math.Sqrt(n))
}

func TestHum(t *testing.T) {
	const n = 48000
	c := plain()
	c.Hum, c.HumFrequency = 0.01, 50
	b := open(t, c)
	req := request(make([]float32, n), 0.03)
	x := record(t, b, req).Mic
	for i, level := range humHarmonics {
		near(t, "hum", cmplx.Abs(tone(x, 50*(i+1))), 0.01*level, 1e-7)
	}
	near(t, "fundamental", cmplx.Abs(tone(x, 50)), 0.01, 1e-7)
	near(t, "between", cmplx.Abs(tone(x, 75)), 0, 1e-7)
	req.Number = 2
	if apart := cmplx.Phase(tone(x, 50) / tone(record(t, b, req).Mic, 50)); math.Abs(apart) < 1e-3 {
		t.Error("hum keeps its phase from take to take")
	}
}

// Triangular dither of two steps' width makes the error of rounding 1/2 step rms and
// its mean independent of the signal (Lipshitz, Wannamaker & Vanderkooy, JAES 40
// (1992) 355, from memory).
func TestConverter(t *testing.T) {
	const n = 100000
	for _, bits := range []int{16, 24} {
		c := plain()
		c.Bits = bits
		b, step := open(t, c), math.Exp2(float64(1-bits))
		for _, level := range []float64{0, 0.3, 0.5, 100.7} {
			x := make([]float64, n)
			for i := range x {
				x[i] = level * step
			}
			var sum, squares float64
			for _, v := range b.convert(x, "mic", "30mm", 1) {
				whole := float64(v) / step
				if whole != math.Round(whole) {
					t.Fatalf("%d bits: %g is not a whole number of steps", bits, whole)
				}
				sum += whole - level
				squares += (whole - level) * (whole - level)
			}
			near(t, "mean error", sum/n, 0, 4*0.5/math.Sqrt(n))
			near(t, "rms error", math.Sqrt(squares/n), 0.5, 0.01)
		}
		ends := b.convert([]float64{5, -5, 1, -1, math.Inf(1), math.Inf(-1)}, "mic", "30mm", 1)
		for i, v := range ends {
			want := 1 - step
			if i%2 == 1 {
				want = -1
			}
			// At ±1 itself dither may stay two steps short.
			near(t, "full scale", float64(v), want, 2*step)
		}
	}
	for _, v := range open(t, plain()).convert([]float64{1.5, -1.5}, "mic", "", 1) {
		near(t, "without converter", math.Abs(float64(v)), 1, 0)
	}
}

// A clock that is fast by 200 ppm makes a recording that is 200 ppm longer, on both
// channels. (The microphone's tolerance is for the ends of the sine, which ring.)
func TestClock(t *testing.T) {
	const n = 48000
	for _, offset := range []float64{200e-6, -200e-6, 10e-6, 1e-3} {
		for f, tolerance := range map[int]float64{100: 3e-6, 1000: 3e-6, 10000: 1e-5, 20000: 2e-4} {
			c := plain()
			c.ClockOffset, c.Loopback = offset, true
			c.SpeedOfSound = 360
			rec := record(t, open(t, c), request(sine(n, f, 0.5), 0.03))
			for i := 5000; i < 43000; i += 11 {
				at := float64(i) / 48000 / (1 + offset)
				near(t, "loopback", float64(rec.Loopback[i]), 0.5*math.Sin(2*math.Pi*float64(f)*at), tolerance)
				near(t, "microphone", float64(rec.Mic[i]), 0.5*math.Sin(2*math.Pi*float64(f)*(at-0.03/360)), tolerance+5e-5)
				if t.Failed() {
					t.Fatalf("%g, %d Hz, sample %d", offset, f, i)
				}
			}
		}
	}
}
