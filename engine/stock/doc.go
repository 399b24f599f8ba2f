// Package stock is the built-in list of what lines are made of: conductors,
// guy and stay strands, ropes, contact wires, music wire. Every value says where
// it comes from, and whether it was read there, is remembered, or was worked
// out. Values are in SI; nothing here knows the scenario language.
package stock
