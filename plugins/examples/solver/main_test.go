package main

import (
	"context"
	"testing"

	"github.com/tautspan/tautspan/plugins/tryout"
)

func TestConforms(t *testing.T) {
	for _, c := range tryout.Run(context.Background(), leapfrog{}) {
		t.Log(c)
		if c.Failed() {
			t.Error(c)
		}
	}
}
