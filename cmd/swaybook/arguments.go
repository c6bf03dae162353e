package main

import (
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// arrange lets flags stand anywhere: it moves the program's flags before the
// command and a command's flags before its arguments, where the cli library
// looks for them. After "--" everything is an argument. Who asks for help gets that on
// the command, whatever its arguments are, in which the library would look for another.
func arrange(app *cli.App, args []string) ([]string, error) {
	var global, command, own, help, rest []string
	commands := app.Commands
	flags := app.Flags
	for i := 1; i < len(args); i++ {
		arg := args[i]
		if arg == "--" {
			rest = append(rest, args[i:]...)
			break
		}
		if !isFlag(arg) {
			if next := find(commands, arg); next != nil && len(rest) == 0 {
				command = append(command, arg)
				commands, flags = next.Subcommands, next.Flags
				continue
			}
			rest = append(rest, arg)
			continue
		}
		words := args[i : i+1]
		if takesValue(arg, flags) || takesValue(arg, app.Flags) {
			if i+1 == len(args) {
				return nil, usagef("flag needs a value: %s", arg)
			}
			i++
			words = args[i-1 : i+1]
		}
		switch {
		case has(app.Flags, arg):
			global = append(global, words...)
		case has([]cli.Flag{cli.HelpFlag}, arg):
			help = words
		default:
			own = append(own, words...)
		}
	}
	switch {
	case help != nil && len(commands) == 0:
		own, rest = append(own, help...), nil
	case len(rest) == 0:
		own = append(own, help...)
	} // else a word is no command, which is to be said first
	return slices.Concat(args[:1], global, command, own, rest), nil
}

// isFlag reports whether the word is a flag; a lone dash and a negative number
// are values.
func isFlag(arg string) bool {
	return len(arg) > 1 && arg[0] == '-' && !strings.ContainsRune("0123456789.", rune(arg[1]))
}

func find(commands []*cli.Command, name string) *cli.Command {
	i := slices.IndexFunc(commands, func(c *cli.Command) bool { return c.HasName(name) })
	if i < 0 {
		return nil
	}
	return commands[i]
}

func flagName(arg string) string {
	name, _, _ := strings.Cut(strings.TrimLeft(arg, "-"), "=")
	return name
}

func has(flags []cli.Flag, arg string) bool {
	return slices.ContainsFunc(flags, func(f cli.Flag) bool { return slices.Contains(f.Names(), flagName(arg)) })
}

// takesValue reports whether the flag is one of flags and wants the next word
// as its value.
func takesValue(arg string, flags []cli.Flag) bool {
	if strings.Contains(arg, "=") {
		return false
	}
	return slices.ContainsFunc(flags, func(f cli.Flag) bool {
		if _, isBool := f.(*cli.BoolFlag); isBool {
			return false
		}
		return slices.Contains(f.Names(), flagName(arg))
	})
}
