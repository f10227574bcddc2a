package bench

import "math"

// Where loudspeaker and microphone stand in the room: the loudspeaker at these
// parts of length, width and height, the microphone before it along the length and
// looking back at it.
var standsAt = [3]float64{0.37, 0.46, 0.48}

// clearance of the microphone from the wall behind it, m.
const clearance = 0.3

// image is a mirror image of the loudspeaker as the capsule's centre sees it.
type image struct {
	along    float64 // m, before the capsule along its axis; behind it negative
	aside    float64 // m, from the axis
	strength float64 // of the pressure: the walls' reflection factors multiplied
}

func (im image) distance() float64 { return math.Hypot(im.along, im.aside) }

// longest distance that has room, m.
func (r *Room) longest() float64 { return (1-standsAt[0])*r.Size[0] - clearance }

// holds reports whether a microphone at a distance stands in the room.
func (r *Room) holds(distance float64) bool { return distance <= r.longest() }

// imageOrder is the number of reflections that are followed; what comes later is
// weaker by reflection^imageOrder and arrives when every gate has closed.
const imageOrder = 4

// images of the loudspeaker in a shoebox room. Along each axis they stand at
// 2mL + s and 2mL − s, after |2m| and |2m−1| reflections. Source: J. B. Allen,
// D. A. Berkley, J. Acoust. Soc. Am. 65, 943 (1979) (from memory).
func (b *Bench) images(r float64) []image {
	room := b.cfg.Room
	if room == nil || room.Reflection == 0 {
		return nil
	}
	var along [3][]mirrored
	for axis, size := range room.Size {
		along[axis] = mirror(standsAt[axis]*size, size)
	}
	microphone := [3]float64{standsAt[0]*room.Size[0] + r, standsAt[1] * room.Size[1], standsAt[2] * room.Size[2]}
	var out []image
	for _, x := range along[0] {
		for _, y := range along[1] {
			for _, z := range along[2] {
				order := x.order + y.order + z.order
				if order == 0 || order > imageOrder {
					continue
				}
				// The capsule looks along −x.
				out = append(out, image{
					along:    microphone[0] - x.at,
					aside:    math.Hypot(y.at-microphone[1], z.at-microphone[2]),
					strength: math.Pow(room.Reflection, float64(order)),
				})
			}
		}
	}
	return out
}

type mirrored struct {
	at    float64
	order int
}

// mirror is the source's place and its images along one axis.
func mirror(source, size float64) []mirrored {
	var out []mirrored
	for m := -imageOrder; m <= imageOrder; m++ {
		out = append(out, mirrored{2*float64(m)*size + source, abs(2 * m)}, mirrored{2*float64(m)*size - source, abs(2*m - 1)})
	}
	return out
}

func abs(n int) int { return max(n, -n) }
