// Package wire is the protocol between tautspan and its plugins, generated from
// tautspan.proto. Authors of plugins in Go use package author instead.
package wire

//go:generate protoc --go_out=. --go_opt=paths=source_relative --go-grpc_out=. --go-grpc_opt=paths=source_relative tautspan.proto
