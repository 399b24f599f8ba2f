package host

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"sort"
	"time"

	"github.com/tautspan/tautspan/plugins/author"
)

// Trusted is a plugin that the user has added.
type Trusted struct {
	Kind   string       `json:"kind"`
	Path   string       `json:"path"`
	SHA256 string       `json:"sha256"`
	Added  string       `json:"added"` // RFC 3339
	About  author.About `json:"about"` // as it said when it was added
	Body   string       `json:"body"`  // of a law: how it is written; "": it is not, or no law
}

// Store is the list of trusted plugins, one file of the user's. No plugin is
// found in any other way.
type Store struct{ file string }

// OpenStore is the store in a folder, which need not exist yet.
func OpenStore(dir string) Store { return Store{filepath.Join(dir, "plugins.json")} }

// File is where the list is kept.
func (s Store) File() string { return s.file }

type storeFile struct {
	Format  int       `json:"format"`
	Plugins []Trusted `json:"plugins"`
}

// List is every trusted plugin, by name. No file is an empty list.
func (s Store) List() ([]Trusted, error) {
	data, err := os.ReadFile(s.file)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, nil
	case err != nil:
		return nil, err
	}
	var f storeFile
	if err := json.Unmarshal(data, &f); err != nil || f.Format != 1 {
		return nil, fmt.Errorf("%s is not a list of plugins that this version reads; move it away and add the plugins again", s.file)
	}
	sort.Slice(f.Plugins, func(a, b int) bool { return f.Plugins[a].About.Name < f.Plugins[b].About.Name })
	return f.Plugins, nil
}

// Find is the trusted plugin of a name.
func (s Store) Find(name string) (Trusted, bool, error) {
	all, err := s.List()
	for _, t := range all {
		if t.About.Name == name {
			return t, true, err
		}
	}
	return Trusted{}, false, err
}

// Put adds a plugin, or replaces the one of the same name.
func (s Store) Put(t Trusted) error {
	all, err := s.List()
	if err != nil {
		return err
	}
	kept := []Trusted{t}
	for _, other := range all {
		if other.About.Name != t.About.Name {
			kept = append(kept, other)
		}
	}
	return s.write(kept)
}

// Remove takes a plugin out; it tells whether it was there.
func (s Store) Remove(name string) (bool, error) {
	all, err := s.List()
	if err != nil {
		return false, err
	}
	kept := all[:0:0]
	for _, t := range all {
		if t.About.Name != name {
			kept = append(kept, t)
		}
	}
	if len(kept) == len(all) {
		return false, nil
	}
	return true, s.write(kept)
}

// write replaces the file whole.
func (s Store) write(all []Trusted) error {
	sort.Slice(all, func(a, b int) bool { return all[a].About.Name < all[b].About.Name })
	data, err := json.MarshalIndent(storeFile{Format: 1, Plugins: all}, "", "  ")
	if err != nil {
		return err
	}
	dir := filepath.Dir(s.file)
	if err := os.MkdirAll(dir, 0o700); err != nil {
		return err
	}
	tmp, err := os.CreateTemp(dir, ".plugins-*")
	if err != nil {
		return err
	}
	defer func() { _ = os.Remove(tmp.Name()) }() // gone when it was renamed
	_, err = tmp.Write(append(data, '\n'))
	if cerr := tmp.Close(); err == nil {
		err = cerr
	}
	if err != nil {
		return err
	}
	return os.Rename(tmp.Name(), s.file)
}

// pluginMost is the largest file taken for a plugin, bytes.
const pluginMost = 1 << 30

// Checksum is the SHA-256 of a program file, hexadecimal.
func Checksum(path string) (string, error) {
	f, err := os.Open(path)
	if err != nil {
		return "", err
	}
	defer func() { _ = f.Close() }()
	info, err := f.Stat()
	switch {
	case err != nil:
		return "", err
	case !info.Mode().IsRegular():
		return "", fmt.Errorf("%s is not a file", path)
	case info.Size() > pluginMost:
		return "", fmt.Errorf("%s is larger than 1 GiB", path)
	case info.Mode().Perm()&0o111 == 0:
		return "", fmt.Errorf("%s may not be executed; chmod +x it first", path)
	}
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}

// Changed tells why a trusted plugin may not run any more; "" where it may.
func (t *Trusted) Changed() string {
	sum, err := Checksum(t.Path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return "its file is gone"
	case err != nil:
		return err.Error()
	case sum != t.SHA256:
		return "its file has changed since it was added"
	}
	return ""
}

// Now stamps an addition.
func Now() string { return time.Now().UTC().Format(time.RFC3339) }
