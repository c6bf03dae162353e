package query

import "cmp"

// The questions' Validate methods tell what is wrong with a question without
// asking it of a store. The error is a UsageError.

// Validate checks the question.
func (q SpectrumQuestion) Validate() error {
	_, err := q.withDefaults()
	return cmp.Or(err, q.Selection.Validate())
}

// Validate checks the question.
func (q DemandQuestion) Validate() error {
	_, err := q.withDefaults()
	return cmp.Or(err, q.Selection.Validate())
}

// Validate checks the question.
func (q PortfolioQuestion) Validate() error {
	_, err := q.withDefaults()
	return cmp.Or(err, q.Selection.Validate())
}

// Validate checks the question.
func (q NearestQuestion) Validate() error {
	_, err := q.withDefaults()
	return cmp.Or(err, q.Selection.Validate())
}

// Validate checks the question.
func (q RecordsQuestion) Validate() error {
	_, err := q.withDefaults()
	return cmp.Or(err, q.Selection.Validate())
}

// Validate checks the expression alone: the rest depends on the question.
func (s Selection) Validate() error {
	_, err := compileWhere(s.Where)
	return err
}
