// Package store writes and recognises result folders.
//
// A folder is written beside its place and renamed into it whole, so one that
// exists is complete. The same content gives the same bytes, times aside.
package store
