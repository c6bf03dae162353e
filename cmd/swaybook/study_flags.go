package main

import (
	"flag"
	"slices"

	"github.com/urfave/cli/v2"

	"swaybook/pipeline/study"
)

// The keys of a study are flags of commands, under the same names, and their
// values are read by the commands themselves.

// ingestKeys are the flags of ingest that stand at the top of a study.
var ingestKeys = []string{"catalogue", "metadata", "layout", "unit", "dt", "recipe", "periods", "dampings"}

// choiceKeys are the flags of statistics that belong to a selection, beside those of
// selectionFlags.
var choiceKeys = []string{"include-duplicates", "include-unknown-directions", "ignore-usable-band", "screen", "balance"}

// fileKeys are the flags whose values are files, and listKeys those that take a list.
var (
	fileKeys = []string{"catalogue", "metadata", "layout", "recipe", "design", "structures"}
	listKeys = []string{"near", "siting", "periods", "dampings", "percentiles", "show", "mark", "capacity"}
)

// noKeys are the flags of questions that a study may not set: it has its own way to say
// where answers go, and asks for what is published.
var noKeys = []string{"format", asOf, against, "plot"}

// figureKeys are the flags of figures.
var figureKeys = []string{"axes", "mark"}

// productCommands are the commands whose questions a study may ask.
var productCommands = map[study.Kind]func() *cli.Command{
	study.Spectrum: querySpectrumCommand,
	study.Demand:   queryDemandCommand,
	study.Records:  queryRecordsCommand,
}

// studyVocabulary are the flags that a study may set.
func studyVocabulary() study.Vocabulary {
	v := study.Vocabulary{Products: map[study.Kind][]study.Flag{}}
	for _, f := range ingestCommand().Flags {
		if slices.Contains(ingestKeys, f.Names()[0]) {
			v.Ingest = append(v.Ingest, studyFlag(f))
		}
	}
	for _, f := range statisticsFlags() {
		name := f.Names()[0]
		isOfScope := slices.ContainsFunc(selectionFlags("", ""), func(s cli.Flag) bool { return s.Names()[0] == name })
		if isOfScope || slices.Contains(choiceKeys, name) {
			v.Selection = append(v.Selection, studyFlag(f))
		}
	}
	for kind, command := range productCommands {
		for _, f := range command().Flags {
			if !slices.Contains(noKeys, f.Names()[0]) {
				v.Products[kind] = append(v.Products[kind], studyFlag(f))
			}
		}
	}
	return v
}

// studyFlag says how a flag takes values in a study.
func studyFlag(f cli.Flag) study.Flag {
	out := study.Flag{Name: f.Names()[0], IsFile: slices.Contains(fileKeys, f.Names()[0])}
	switch f.(type) {
	case *cli.BoolFlag:
		out.Form = study.Switch
	case *cli.StringSliceFlag:
		out.Form = study.Repeated
	default:
		if slices.Contains(listKeys, out.Name) {
			out.Form = study.List
		}
	}
	if out.Name == "recipe" {
		out.IsNeeded = true // what a store is computed by must not depend on its past
		out.Words = builtInRecipes()
	}
	return out
}

// flagContext is what the command would see if its flags were set so. What a flag does not
// take is an error of that flag, and not set.
func flagContext(c *cli.Context, command *cli.Command, settings []study.Setting) (*cli.Context, []error) {
	var wrong []error
	set := flag.NewFlagSet(command.Name, flag.ContinueOnError)
	for _, f := range command.Flags {
		if err := f.Apply(set); err != nil {
			wrong = append(wrong, &flagError{f.Names()[0], err})
		}
	}
	for _, s := range settings {
		if set.Lookup(s.Key) == nil {
			continue // of a selection; the study's reader has refused it
		}
		if err := set.Set(s.Key, s.Value); err != nil {
			wrong = append(wrong, &flagError{s.Key, usagef("want %s, found %q", wanted(command, s.Key), s.Value)})
		}
	}
	inner := cli.NewContext(c.App, set, nil)
	inner.Context, inner.Command = c.Context, command
	return inner, wrong
}

// wanted says what values a flag takes that does not take all.
func wanted(command *cli.Command, name string) string {
	i := slices.IndexFunc(command.Flags, func(f cli.Flag) bool { return f.Names()[0] == name })
	switch command.Flags[i].(type) {
	case *cli.IntFlag:
		return "a whole number"
	case *cli.Uint64Flag:
		return "a whole number that is not negative"
	}
	return "a number"
}
