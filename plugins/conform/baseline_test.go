package conform_test

import (
	"math"
	"math/cmplx"
)

// The plain scripts that the solvers are timed against: what a careful user
// would write in an afternoon, one loop a step, in the same language.

// resample reads records taken every dt at rows times every apart, by the cubic
// through the four samples around; straight lines between the samples would
// leave an error of their own.
func resample(taken [][]float64, dt float64, rows int, every float64) [][]float64 {
	out := make([][]float64, len(taken))
	for p, u := range taken {
		out[p] = make([]float64, rows)
		for i := range out[p] {
			at := float64(i) * every / dt
			k := min(max(int(at)-1, 0), len(u)-4)
			s := at - float64(k)
			out[p][i] = -u[k]*(s-1)*(s-2)*(s-3)/6 + u[k+1]*s*(s-2)*(s-3)/2 - u[k+2]*s*(s-1)*(s-3)/2 + u[k+3]*s*(s-1)*(s-2)/6
		}
	}
	return out
}

// leapfrogUniform steps m u_tt + c u_t = T u_xx + F(t) delta(x-at) by central
// differences at Courant number 1 over cells cells, fixed ends, at rest in the
// shape start (nil: straight). Order 2. Push and probes must be grid points.
func leapfrogUniform(length, mass, tension, viscous float64, cells int, start func(float64) float64,
	force func(float64) float64, at float64, probes []float64, rows int, every float64) [][]float64 {
	dx := length / float64(cells)
	dt := dx / math.Sqrt(tension/mass)
	g := viscous * dt / (2 * mass)
	now, old, next := make([]float64, cells+1), make([]float64, cells+1), make([]float64, cells+1)
	if start != nil {
		for i := 1; i < cells; i++ {
			now[i] = start(float64(i) * dx)
		}
	}
	grid := func(x float64) int { return int(math.Round(x / dx)) }
	scale, push := 1/(1+g), dt*dt/(mass*dx)
	copy(old, now) // u(-dt) = u(dt) = u + dt^2/2 u_tt: at rest
	for i := 1; i < cells; i++ {
		old[i] = (now[i+1] + now[i-1]) / 2
	}
	steps := int(float64(rows-1)*every/dt) + 4
	taken := make([][]float64, len(probes))
	for n := range steps {
		for p, x := range probes {
			taken[p] = append(taken[p], now[grid(x)])
		}
		for i := 1; i < cells; i++ {
			next[i] = (2*now[i] - (1-g)*old[i] + (now[i+1] - 2*now[i] + now[i-1])) * scale
		}
		if force != nil {
			next[grid(at)] += push * force(float64(n)*dt) * scale
		}
		old, now, next = now, next, old
	}
	return resample(taken, dt, rows, every)
}

// leapfrogMatched steps the struck line with dx = c dt in every segment, 6k, 12k
// and 5k cells, and the masses of half cells and clamps lumped at the nodes:
//
//	M u_tt + C u_t = T/dx_right (u_right - u) - T/dx_left (u - u_left) + F
//
// Order 2. For k a multiple of 5 push and probe are grid points.
func leapfrogMatched(k, rows int, every float64) [][]float64 {
	const tension, viscous, f0, d = 20000.0, 0.08, 500.0, 0.008
	lengths, masses, counts := [3]float64{30, 45, 25}, [3]float64{0.9, 1.6, 0.9}, [3]int{6 * k, 12 * k, 5 * k}
	cells := 23 * k
	mass, damp, stiff := make([]float64, cells+1), make([]float64, cells+1), make([]float64, cells)
	i := 0
	for s := range lengths {
		dx := lengths[s] / float64(counts[s])
		for range counts[s] {
			stiff[i] = tension / dx
			for _, node := range []int{i, i + 1} {
				mass[node] += masses[s] * dx / 2
				damp[node] += viscous * dx / 2
			}
			i++
		}
	}
	mass[6*k] += 4
	mass[18*k] += 1.5
	damp[18*k] += 120
	dt := lengths[0] / math.Sqrt(tension/masses[0]) / float64(counts[0])
	left, right, back, push := make([]float64, cells+1), make([]float64, cells+1), make([]float64, cells+1), make([]float64, cells+1)
	for i := 1; i < cells; i++ {
		scale := 1 / (mass[i] + damp[i]*dt/2)
		left[i], right[i], push[i] = stiff[i-1]*dt*dt*scale, stiff[i]*dt*dt*scale, dt*dt*scale
		back[i] = (mass[i] - damp[i]*dt/2) * scale
	}
	at, probe := 12*k/5, 14*k
	now, old, next := make([]float64, cells+1), make([]float64, cells+1), make([]float64, cells+1)
	steps := int(float64(rows-1)*every/dt) + 4
	taken := make([]float64, 0, steps)
	for n := range steps {
		taken = append(taken, now[probe])
		for i := 1; i < cells; i++ {
			next[i] = (1+back[i])*now[i] - back[i]*old[i] + right[i]*(now[i+1]-now[i]) - left[i]*(now[i]-now[i-1])
		}
		if t := float64(n) * dt; t < d {
			next[at] += push[at] * f0 * math.Sin(math.Pi*t/d)
		}
		old, now, next = now, next, old
	}
	return resample([][]float64{taken}, dt, rows, every)
}

// modeSum is the plucked line by so many modes, each a cosine that dies away.
func modeSum(modes, rows int, every float64) [][]float64 {
	const L, m, T, c, a, h, r, x = 20.0, 0.35, 8400.0, 0.05, 4.0, 0.02, 0.2, 7.0
	const g = c / (2 * m)
	fade, out := make([]float64, rows), make([]float64, rows)
	for i := range fade {
		fade[i] = math.Exp(-g * float64(i) * every)
	}
	for n := 1; n <= modes; n++ {
		k := float64(n) * math.Pi / L
		w := math.Sqrt(T/m*k*k - g*g)
		b := 2 / (L * k * k) * (h/a + h/(L-a)) * math.Sin(k*a) * math.Sin(k*r) / (k * r) * math.Sin(k*x)
		b, phase := b*math.Hypot(1, g/w), math.Atan2(g, w)
		for i := range out {
			out[i] += b * fade[i] * math.Cos(w*float64(i)*every-phase)
		}
	}
	return [][]float64{out}
}

// modeFilters is the line under the tones by one recursive filter a mode, exact
// for a force that is straight between samples; sub samples an output interval.
func modeFilters(modes, sub, rows int) [][]float64 {
	const g = tonesViscous / (2 * tonesMass)
	dt := tonesEvery / float64(sub)
	steps := (rows-1)*sub + 1
	force := make([]float64, steps)
	for _, f := range tones() {
		for i := range force {
			force[i] += tonesPeak * math.Sin(2*math.Pi*f*float64(i)*dt)
		}
	}
	heard := tonesHeard()
	out := make([][]float64, len(heard))
	for p := range out {
		out[p] = make([]float64, rows)
	}
	for j := 1; j <= modes; j++ {
		k := float64(j) * math.Pi / tonesLength
		d := math.Sqrt(tonesTension/tonesMass*k*k - g*g)
		b := 2 / (tonesMass * tonesLength) * math.Sin(k*tonesAt) / d
		var shape [3]float64
		for p, x := range heard {
			shape[p] = b * math.Sin(k*x)
		}
		// z' = s z + f with s = -g + id; the mode is Im z b.
		s := complex(-g, d)
		e := cmplx.Exp(s * complex(dt, 0))
		h := complex(dt, 0)
		all := (e - 1) / s                  // integral of e^{s(h-t)}
		late := (e - 1 - s*h) / (s * s * h) // the same of e^{s(h-t)} t/h
		early := all - late
		var z complex128
		for i := 1; i < steps; i++ {
			z = e*z + early*complex(force[i-1], 0) + late*complex(force[i], 0)
			if i%sub == 0 {
				for p := range out {
					out[p][i/sub] += shape[p] * imag(z)
				}
			}
		}
	}
	return out
}
