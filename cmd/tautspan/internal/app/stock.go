package app

import (
	"fmt"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/engine/stock"
)

// StockDoc lists built-in stock.
type StockDoc struct {
	Head
	Stock []StockRow `json:"stock"`
}

// StockRow is one built-in stock, each value with where it comes from.
type StockRow struct {
	Name        string     `json:"name"`
	Title       string     `json:"title"`
	Family      string     `json:"family"`
	Wires       *int       `json:"wires"` // null where not known
	Diameter    StockValue `json:"diameter_m"`
	Area        StockValue `json:"area_m2"`
	Mass        StockValue `json:"mass_kg_per_m"`
	Young       StockValue `json:"young_pa"`
	YoungLow    float64    `json:"young_low_pa"`
	YoungHigh   float64    `json:"young_high_pa"`
	Axial       float64    `json:"axial_n"` // young times area
	Strength    StockValue `json:"strength_n"`
	BendingLow  *float64   `json:"bending_low_n_m2"`  // wires that slide; null where not known
	BendingHigh float64    `json:"bending_high_n_m2"` // a solid bar of the same metal area
	Usual       *StockText `json:"usual_tension"`
	Note        string     `json:"note"`
}

// StockValue is a number with where it comes from.
type StockValue struct {
	Value  float64 `json:"value"`
	Origin string  `json:"origin"` // seen, computed, memory
	Source string  `json:"source"`
}

// StockText is a statement with where it comes from.
type StockText struct {
	Text   string `json:"text"`
	Origin string `json:"origin"`
	Source string `json:"source"`
}

// Stock lists the built-in stock whose name, title or family holds the words
// given; all of it where there are none.
func (a *App) Stock(words string) (*StockDoc, Status) {
	doc := &StockDoc{Head: Head{Format: Format, Version: Version, Command: "stock", Engine: engineOf(), Errors: diag.List{}, Warnings: diag.List{}}, Stock: []StockRow{}}
	for _, e := range stock.Search(words) {
		doc.Stock = append(doc.Stock, stockRow(&e))
	}
	if len(doc.Stock) > 0 {
		return doc, Done
	}
	var names []string
	for _, e := range stock.List() {
		names = append(names, e.Name)
	}
	doc.Errors = append(doc.Errors, diag.Diagnostic{
		Code: "unknown-name", Severity: diag.Error, Span: diag.Span{File: diag.NewFile("command line", "")},
		Summary: fmt.Sprintf("no built-in stock has %q in its name, title or family", strings.Join(strings.Fields(words), " ")), Hint: diag.Nearest(strings.TrimSpace(words), names),
	})
	return doc, BadInput
}

func stockRow(e *stock.Entry) StockRow {
	low, high := e.BendingBounds()
	row := StockRow{
		Name: e.Name, Title: e.Title, Family: e.Family, Note: e.Note,
		Diameter: stockValue(e.Diameter), Area: stockValue(e.Area), Mass: stockValue(e.Mass), Young: stockValue(e.Young), Strength: stockValue(e.Strength),
		YoungLow: e.YoungLow, YoungHigh: e.YoungHigh, Axial: e.Axial(), BendingHigh: high,
	}
	if e.Wires > 0 {
		row.Wires, row.BendingLow = &e.Wires, &low
	}
	if e.Usual.Text != "" {
		row.Usual = &StockText{Text: e.Usual.Text, Origin: e.Usual.Origin.String(), Source: e.Usual.Source}
	}
	return row
}

func stockValue(v stock.Value) StockValue {
	return StockValue{Value: v.SI, Origin: v.Origin.String(), Source: v.Source}
}
