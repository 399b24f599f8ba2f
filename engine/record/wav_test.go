package record_test

import (
	"bytes"
	"encoding/binary"
	"errors"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/record"
)

// wave writes a WAV file by the letter of its definition (Microsoft and IBM,
// Multimedia Programming Interface and Data Specifications 1.0, 1991, and the
// extensible header of 1999; both from memory), with a chunk of odd length before
// the samples, as some loggers write them.
func wave(format, bits, channels, rate int, extensible bool, frames [][]float64) []byte {
	var data bytes.Buffer
	for _, frame := range frames {
		for _, v := range frame {
			switch {
			case format == 3 && bits == 32:
				_ = binary.Write(&data, binary.LittleEndian, float32(v))
			case format == 3:
				_ = binary.Write(&data, binary.LittleEndian, v)
			case bits == 8:
				data.WriteByte(byte(int(math.Round(v*128)) + 128))
			default:
				n := int64(math.Round(v * math.Pow(2, float64(bits-1))))
				for k := range bits / 8 {
					data.WriteByte(byte(n >> (8 * k)))
				}
			}
		}
	}
	var head bytes.Buffer
	put := func(values ...any) {
		for _, v := range values {
			_ = binary.Write(&head, binary.LittleEndian, v)
		}
	}
	tag := uint16(format)
	if extensible {
		tag = 0xFFFE
	}
	put(tag, uint16(channels), uint32(rate), uint32(rate*channels*bits/8), uint16(channels*bits/8), uint16(bits))
	if extensible {
		put(uint16(22), uint16(bits), uint32(0), uint16(format))
		head.Write([]byte{0, 0, 0, 0, 0x10, 0, 0x80, 0, 0, 0xAA, 0, 0x38, 0x9B, 0x71})
	}
	var out bytes.Buffer
	chunk := func(name string, b []byte) {
		out.WriteString(name)
		_ = binary.Write(&out, binary.LittleEndian, uint32(len(b)))
		out.Write(b)
		if len(b)%2 == 1 {
			out.WriteByte(0)
		}
	}
	out.WriteString("WAVE")
	chunk("fmt ", head.Bytes())
	chunk("note", []byte("odd"))
	chunk("data", data.Bytes())
	chunk("tail", []byte("after"))
	var whole bytes.Buffer
	whole.WriteString("RIFF")
	_ = binary.Write(&whole, binary.LittleEndian, uint32(out.Len()))
	whole.Write(out.Bytes())
	return whole.Bytes()
}

// Every sample format, one and several channels, gives the samples back to its own
// resolution.
func TestWaveFormats(t *testing.T) {
	const n = 70_001 // more than two blocks
	for _, c := range []struct {
		name         string
		format, bits int
		step         float64
	}{
		{"8 bit", 1, 8, 1.0 / 128}, {"16 bit", 1, 16, 1.0 / 32768}, {"24 bit", 1, 24, 1.0 / (1 << 23)}, {"32 bit", 1, 32, 1.0 / (1 << 31)},
		{"floating point 32", 3, 32, 1e-7}, {"floating point 64", 3, 64, 1e-16},
	} {
		for _, channels := range []int{1, 3} {
			for _, extensible := range []bool{false, true} {
				frames := make([][]float64, n)
				value := func(i, ch int) float64 { return 0.9 * math.Sin(0.01*float64(i)*float64(ch+1)) }
				for i := range frames {
					for ch := range channels {
						frames[i] = append(frames[i], value(i, ch))
					}
				}
				r, err := record.Read(bytes.NewReader(wave(c.format, c.bits, channels, 12_800, extensible, frames)), record.Options{})
				if err != nil {
					t.Errorf("%s, %d channels, extensible %v: %v", c.name, channels, extensible, err)
					continue
				}
				if r.Rate != 12_800 || len(r.Channels) != channels {
					t.Errorf("%s: rate %v, %d channels", c.name, r.Rate, len(r.Channels))
				}
				for ch := range r.Channels {
					if got := len(r.Channels[ch].Samples); got != n {
						t.Fatalf("%s: %d samples of %d", c.name, got, n)
					}
					for i, v := range r.Channels[ch].Samples {
						if math.Abs(v-value(i, ch)) > 0.51*c.step {
							t.Fatalf("%s, channel %d: sample %d is %v, expected %v", c.name, ch+1, i, v, value(i, ch))
						}
					}
				}
			}
		}
	}
}

// A stretch of one channel is the same as the stretch of the whole.
func TestWaveCut(t *testing.T) {
	var frames [][]float64
	for i := range 1000 {
		frames = append(frames, []float64{float64(i) / 1024, -float64(i) / 1024})
	}
	r, err := record.Read(bytes.NewReader(wave(3, 32, 2, 100, false, frames)), record.Options{Only: []string{"2"}, From: 2, To: 4})
	if err != nil {
		t.Fatal(err)
	}
	x := r.Channels[0].Samples
	if len(r.Channels) != 1 || len(x) != 201 || x[0] != -200.0/1024 || x[200] != -400.0/1024 || r.Start != 2 {
		t.Errorf("%d samples from %v to %v, start %v", len(x), x[0], x[len(x)-1], r.Start)
	}
}

// Damaged files are refused, whatever their head promises, before memory is asked
// for; a file that ends early keeps what it has, and one that promises too much is
// read to its end (the 14 bytes of the chunk behind are 7 samples more).
func TestDamagedWaves(t *testing.T) {
	var frames [][]float64
	for i := range 100 {
		frames = append(frames, []float64{float64(i) / 128})
	}
	good := wave(1, 16, 1, 100, false, frames)
	change := func(at int, b ...byte) []byte {
		out := append([]byte(nil), good...)
		copy(out[at:], b)
		return out
	}
	at := bytes.Index(good, []byte("data"))
	for name, c := range map[string]struct {
		file    []byte
		code    string
		samples int
	}{
		"whole":              {good, "", 100},
		"head only":          {good[:30], "broken-wav", 0},
		"cut early":          {good[:at+8+100], "", 50},
		"promises 4 GB":      {change(at+4, 0xff, 0xff, 0xff, 0xff), "", 107},
		"no channels":        {change(22, 0, 0), "broken-wav", 0},
		"many channels":      {change(22, 0xff, 0xff), "broken-wav", 0},
		"rate of nothing":    {change(24, 0, 0, 0, 0), "broken-wav", 0},
		"compressed":         {change(20, 2, 0), "unknown-wav", 0},
		"12 bit":             {change(34, 12, 0), "unknown-wav", 0},
		"no samples":         {good[:at+8], "empty-record", 0},
		"not a wave":         {append([]byte("RIFF\x10\x00\x00\x00AVI "), good[12:]...), "not-a-wav", 0},
		"another byte order": {append([]byte("RIFX"), good[4:]...), "unknown-wav", 0},
	} {
		r, err := record.Read(bytes.NewReader(c.file), record.Options{})
		var e *record.Error
		switch {
		case c.code == "" && err != nil:
			t.Errorf("%s: %v", name, err)
		case c.code != "" && (!errors.As(err, &e) || e.Code != c.code):
			t.Errorf("%s: %v, expected %s", name, err, c.code)
		case c.code == "" && len(r.Channels[0].Samples) != c.samples:
			t.Errorf("%s: %d samples, expected %d", name, len(r.Channels[0].Samples), c.samples)
		}
	}
	nan := wave(3, 32, 1, 100, false, [][]float64{{0}, {math.NaN()}, {0}})
	var e *record.Error
	if _, err := record.Read(bytes.NewReader(nan), record.Options{}); !errors.As(err, &e) || e.Code != "not-finite" {
		t.Errorf("a sample that is no number: %v", err)
	}
}
