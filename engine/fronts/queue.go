package fronts

import (
	"container/heap"
	"math"
)

// instant is a time as the unevaluated sum of two doubles, so that two routes of
// the same length agree in time after any number of passages.
type instant struct{ hi, lo float64 }

// add is exact in hi + lo to about 1e-32 (two-sum of Knuth).
func (t instant) add(d float64) instant {
	s := t.hi + d
	b := s - t.hi
	lo := t.lo + ((t.hi - (s - b)) + (d - b))
	hi := s + lo
	return instant{hi, lo - (hi - s)}
}

// step is one word of a path, linked backwards.
type step struct {
	before *step
	word   string
	length int
}

func (s *step) then(word string) *step {
	if word == "" {
		return s
	}
	if s == nil {
		return &step{word: word, length: 1}
	}
	return &step{s, word, s.length + 1}
}

// The words kept of a long path, at its start and at its end.
const (
	pathHead = 12
	pathTail = 12
)

// words writes the path out; a long one has "..." in its middle.
func (s *step) words() []string {
	if s == nil {
		return nil
	}
	long := s.length > pathHead+pathTail+1
	n := s.length
	if long {
		n = pathHead + pathTail + 1
	}
	out := make([]string, n)
	at := n - 1
	for p := s; p != nil; p = p.before {
		switch {
		case long && p.length > s.length-pathTail, long && p.length <= pathHead:
			if p.length <= pathHead {
				at = p.length - 1
			}
			out[at] = p.word
		case long:
			out[pathHead] = "..."
			continue
		default:
			out[at] = p.word
		}
		at--
	}
	return out
}

// meeting is everything that arrives at one joint at one instant for one
// account: in[p] is the wave that comes to port p, nil for none.
type meeting struct {
	when    instant
	joint   int
	account int
	in      [][]float64
	path    *step
	loudest float64
	merged  int
}

type key struct {
	tick           int64
	joint, account int
}

// queue holds the meetings to come in order of time, and finds the one that a
// new arrival belongs to.
type queue struct {
	heap meetings
	find map[key]*meeting
	unit float64 // s, 1e-9 of the shortest travel time
}

func (q *queue) key(t instant, joint, account int) key {
	return key{int64(math.Round(t.hi / q.unit)), joint, account}
}

// at finds or makes the meeting at a joint and instant.
func (q *queue) at(t instant, joint, account, ports int) *meeting {
	k := q.key(t, joint, account)
	for _, d := range [3]int64{0, -1, 1} {
		if e := q.find[key{k.tick + d, joint, account}]; e != nil {
			return e
		}
	}
	e := &meeting{when: t, joint: joint, account: account, in: make([][]float64, ports)}
	q.find[k] = e
	heap.Push(&q.heap, e)
	return e
}

func (q *queue) pop() *meeting {
	e := heap.Pop(&q.heap).(*meeting)
	delete(q.find, q.key(e.when, e.joint, e.account))
	return e
}

type meetings []*meeting

func (h meetings) Len() int { return len(h) }
func (h meetings) Less(i, j int) bool {
	a, b := h[i], h[j]
	switch {
	case a.when.hi != b.when.hi:
		return a.when.hi < b.when.hi
	case a.when.lo != b.when.lo:
		return a.when.lo < b.when.lo
	case a.joint != b.joint:
		return a.joint < b.joint
	}
	return a.account < b.account
}
func (h meetings) Swap(i, j int) { h[i], h[j] = h[j], h[i] }
func (h *meetings) Push(x any)   { *h = append(*h, x.(*meeting)) }
func (h *meetings) Pop() any {
	old := *h
	e := old[len(old)-1]
	old[len(old)-1] = nil
	*h = old[:len(old)-1]
	return e
}

// A wave is the amplitude of a front: one number, or its shape at the times of
// the network's grid.

// plus adds factor times b to a and may use a's storage.
func plus(a, b []float64, factor float64) []float64 {
	switch {
	case len(a) == 0:
		a = make([]float64, len(b))
	case len(a) < len(b):
		wide := make([]float64, len(b))
		for i := range wide {
			wide[i] = a[0]
		}
		a = wide
	}
	for i := range a {
		if len(b) == 1 {
			a[i] += factor * b[0]
		} else {
			a[i] += factor * b[i]
		}
	}
	return a
}

// largest is the largest magnitude that a wave reaches.
func largest(w []float64) float64 {
	top := 0.0
	for _, v := range w {
		top = math.Max(top, math.Abs(v))
	}
	return top
}
