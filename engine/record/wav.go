package record

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"

	"github.com/go-audio/audio"
	"github.com/go-audio/wav"
)

// The sample formats of a WAV file.
const (
	formatPCM        = 1
	formatFloat      = 3
	formatExtensible = 0xFFFE
)

// wavShape is what the headers of a WAV file say.
type wavShape struct {
	format, channels, bits int
	rate                   uint32
	dataAt, dataSize       int64
}

// scanWAV walks the chunks before anything is taken for granted: a header that
// tells of more than the file holds must not lead to memory being asked for.
func scanWAV(r io.ReadSeeker) (*wavShape, error) {
	size, err := r.Seek(0, io.SeekEnd)
	if err != nil {
		return nil, err
	}
	if _, err := r.Seek(0, io.SeekStart); err != nil {
		return nil, err
	}
	var head [12]byte
	if _, err := io.ReadFull(r, head[:]); err != nil || string(head[:4]) != "RIFF" || string(head[8:]) != "WAVE" {
		return nil, &Error{Code: "not-a-wav", What: "this is no WAV file", Hint: "a logger's table is read as CSV: give it the ending .csv"}
	}
	s := &wavShape{}
	at := int64(12)
	for at+8 <= size && s.dataAt == 0 {
		var chunk [8]byte
		if _, err := r.Seek(at, io.SeekStart); err != nil {
			return nil, err
		}
		if _, err := io.ReadFull(r, chunk[:]); err != nil {
			return nil, err
		}
		length := int64(binary.LittleEndian.Uint32(chunk[4:]))
		switch string(chunk[:4]) {
		case "fmt ":
			if err := s.readFormat(r, length); err != nil {
				return nil, err
			}
		case "data":
			s.dataAt, s.dataSize = at+8, min(length, size-at-8)
			continue
		default:
			if at+8+length > size {
				return nil, &Error{Code: "broken-wav", What: fmt.Sprintf("the chunk %q tells of %d bytes, and the file ends before", chunk[:4], length)}
			}
		}
		at += 8 + length + length%2
	}
	switch {
	case s.channels == 0:
		return nil, &Error{Code: "broken-wav", What: "the file does not say how its samples are written"}
	case s.dataAt == 0 || s.dataSize == 0:
		return nil, &Error{Code: "empty-record", What: "the file holds no samples"}
	}
	return s, nil
}

func (s *wavShape) readFormat(r io.Reader, length int64) error {
	if length < 16 || length > 1<<16 {
		return &Error{Code: "broken-wav", What: fmt.Sprintf("a format header of %d bytes", length)}
	}
	b := make([]byte, length)
	if _, err := io.ReadFull(r, b); err != nil {
		return &Error{Code: "broken-wav", What: "the file ends within its header"}
	}
	s.format, s.channels = int(binary.LittleEndian.Uint16(b)), int(binary.LittleEndian.Uint16(b[2:]))
	s.rate, s.bits = binary.LittleEndian.Uint32(b[4:]), int(binary.LittleEndian.Uint16(b[14:]))
	if s.format == formatExtensible && length >= 26 {
		s.format = int(binary.LittleEndian.Uint16(b[24:]))
	}
	known := s.format == formatPCM && (s.bits == 8 || s.bits == 16 || s.bits == 24 || s.bits == 32) || s.format == formatFloat && (s.bits == 32 || s.bits == 64)
	switch {
	case !known:
		return &Error{Code: "unknown-wav", What: fmt.Sprintf("samples of format %d with %d bits are not read", s.format, s.bits), Hint: "write it as PCM of 16, 24 or 32 bit, or as floating point"}
	case s.channels < 1 || s.channels > 64:
		return &Error{Code: "broken-wav", What: fmt.Sprintf("%d channels", s.channels)}
	case s.rate == 0:
		return &Error{Code: "broken-wav", What: "a sampling rate of 0 Hz"}
	}
	return nil
}

// ReadWAV reads a WAV file: PCM of 8, 16, 24 or 32 bit, floating point of 32 or
// 64. Samples come in parts of full scale.
func ReadWAV(r io.ReadSeeker, opt Options) (*Record, error) {
	s, err := scanWAV(r)
	if err != nil {
		return nil, err
	}
	frame := int64(s.channels * s.bits / 8)
	frames := s.dataSize / frame
	rec := &Record{Rate: float64(s.rate)}
	all := make([]Channel, s.channels)
	for c := range all {
		all[c].Name = strconv.Itoa(c + 1)
	}
	kept, err := choose(all, opt.Only)
	if err != nil {
		return nil, err
	}
	first, last := int64(math.Ceil(opt.From*rec.Rate)), frames
	if opt.To > 0 {
		last = min(frames, int64(opt.To*rec.Rate)+1)
	}
	switch {
	case first >= last:
		return nil, &Error{Code: "empty-record", What: fmt.Sprintf("nothing is left between %g s and %g s of a record of %.4g s", opt.From, opt.To, float64(frames)/rec.Rate)}
	case (last-first)*int64(len(kept)) > samplesMost:
		return nil, tooLong((last - first) * int64(len(kept)))
	}
	for _, c := range kept {
		rec.Channels = append(rec.Channels, Channel{Name: all[c].Name, Samples: make([]float64, 0, last-first)})
	}
	rec.Start = float64(first) / rec.Rate
	take := func(block []float64, at int64) {
		for i := 0; i*s.channels < len(block); i++ {
			if n := at + int64(i); n < first || n >= last {
				continue
			}
			for k, c := range kept {
				rec.Channels[k].Samples = append(rec.Channels[k].Samples, block[i*s.channels+c])
			}
		}
	}
	if s.format == formatFloat {
		err = readFloats(r, s, frames, take)
	} else {
		err = readPCM(r, s, frames, take)
	}
	if err != nil {
		return nil, err
	}
	rec.look()
	return rec, nil
}

func tooLong(n int64) error {
	return &Error{Code: "too-long", What: fmt.Sprintf("%d samples are more than are held at once (%d)", n, samplesMost), Hint: "take one channel, or a part: --channel, --from, --to"}
}

// framesBlock is how many frames are read at once.
const framesBlock = 1 << 15

// readPCM hands blocks of integer samples over, as parts of full scale.
func readPCM(r io.ReadSeeker, s *wavShape, frames int64, take func([]float64, int64)) error {
	if _, err := r.Seek(s.dataAt, io.SeekStart); err != nil {
		return err
	}
	d := wav.NewDecoder(&plain{io.MultiReader(bytes.NewReader(s.plainHead()), io.LimitReader(r, s.dataSize))})
	if err := d.FwdToPCM(); err != nil {
		return err
	}
	ints := &audio.IntBuffer{Data: make([]int, framesBlock*s.channels), Format: &audio.Format{NumChannels: s.channels, SampleRate: int(s.rate)}}
	block := make([]float64, len(ints.Data))
	full, zero := math.Pow(2, float64(s.bits-1)), 0
	if s.bits == 8 {
		zero = 128 // 8 bit samples have no sign
	}
	for at := int64(0); at < frames; {
		n, err := d.PCMBuffer(ints)
		if err != nil {
			return err
		}
		if n == 0 {
			return nil
		}
		n -= n % s.channels
		for i, v := range ints.Data[:n] {
			block[i] = float64(v-zero) / full
		}
		take(block[:n], at)
		at += int64(n / s.channels)
	}
	return nil
}

// plainHead is a head of the simplest form, with what scanWAV has found: the
// decoder need not know extensible heads, other chunks, or sizes that lie.
func (s *wavShape) plainHead() []byte {
	b := append([]byte("RIFF"), 0, 0, 0, 0)
	binary.LittleEndian.PutUint32(b[4:], uint32(s.dataSize+36))
	b = append(b, "WAVEfmt "...)
	b = binary.LittleEndian.AppendUint32(b, 16)
	b = binary.LittleEndian.AppendUint16(b, formatPCM)
	b = binary.LittleEndian.AppendUint16(b, uint16(s.channels))
	b = binary.LittleEndian.AppendUint32(b, s.rate)
	frame := s.channels * s.bits / 8
	b = binary.LittleEndian.AppendUint32(b, s.rate*uint32(frame))
	b = binary.LittleEndian.AppendUint16(b, uint16(frame))
	b = binary.LittleEndian.AppendUint16(b, uint16(s.bits))
	b = append(b, "data"...)
	return binary.LittleEndian.AppendUint32(b, uint32((s.dataSize+1)&^1))
}

// plain is read forward only, and gives as much as is asked for: the decoder takes
// what one Read gives, and would lose step with the channels after a short one.
type plain struct{ r io.Reader }

// Read fills b, but for the end.
func (p *plain) Read(b []byte) (int, error) {
	n, err := io.ReadFull(p.r, b)
	if n > 0 && errors.Is(err, io.ErrUnexpectedEOF) {
		err = nil
	}
	return n, err
}

// Seek is not needed for a head of the simplest form.
func (p *plain) Seek(int64, int) (int64, error) {
	return 0, errors.New("record: a WAV file is read forward only")
}

// readFloats hands blocks of floating-point samples over. The library's decoder
// takes them for integers.
func readFloats(r io.ReadSeeker, s *wavShape, frames int64, take func([]float64, int64)) error {
	if _, err := r.Seek(s.dataAt, io.SeekStart); err != nil {
		return err
	}
	size := s.bits / 8
	raw := make([]byte, framesBlock*s.channels*size)
	block := make([]float64, framesBlock*s.channels)
	for at := int64(0); at < frames; {
		n := min(int64(framesBlock), frames-at)
		b := raw[:n*int64(s.channels*size)]
		if _, err := io.ReadFull(r, b); err != nil {
			return err
		}
		for i := range int(n) * s.channels {
			if size == 4 {
				block[i] = float64(math.Float32frombits(binary.LittleEndian.Uint32(b[4*i:])))
			} else {
				block[i] = math.Float64frombits(binary.LittleEndian.Uint64(b[8*i:]))
			}
			if math.IsNaN(block[i]) || math.IsInf(block[i], 0) {
				return &Error{Code: "not-finite", What: fmt.Sprintf("sample %d is %v", at+int64(i/s.channels)+1, block[i])}
			}
		}
		take(block[:int(n)*s.channels], at)
		at += n
	}
	return nil
}

// choose resolves headings or numbers to channels.
func choose(all []Channel, only []string) ([]int, error) {
	if len(only) == 0 {
		out := make([]int, len(all))
		for i := range out {
			out[i] = i
		}
		return out, nil
	}
	var out []int
	for _, want := range only {
		found := -1
		for i := range all {
			if all[i].Name == want {
				found = i
			}
		}
		if n, err := strconv.Atoi(want); found < 0 && err == nil && n >= 1 && n <= len(all) {
			found = n - 1
		}
		if found < 0 {
			names := ""
			for i := range all {
				if i > 0 {
					names += ", "
				}
				names += all[i].Name
			}
			return nil, &Error{Code: "unknown-channel", What: fmt.Sprintf("no channel is called %q; there are %s", want, names)}
		}
		out = append(out, found)
	}
	return out, nil
}
