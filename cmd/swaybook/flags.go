package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"log/slog"
	"os"
	"slices"
	"strings"
	"time"

	"github.com/urfave/cli/v2"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/pipeline/cluster"
	"swaybook/query"
)

const (
	defaultStore  = "swaybook.db"
	storeVariable = "SWAYBOOK_STORE"
	// kernelVariable chooses the solver's inner loops, for tests and comparisons.
	kernelVariable = "SWAYBOOK_KERNEL"
)

func globalFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: "store", Usage: "the store, one SQLite `FILE` (default: the variable " + storeVariable + ", else " + defaultStore + ")"},
		&cli.StringFlag{Name: "log", Value: "text", Usage: "form of the messages on stderr: text or json"},
		&cli.BoolFlag{Name: "quiet", DisableDefaultText: true, Usage: "no progress and no messages but errors"},
	}
}

// storePath is the store that the flag names, else the environment, which does
// not count where it is empty.
func storePath(c *cli.Context) string {
	if c.IsSet("store") {
		return c.String("store")
	}
	return cmp.Or(os.Getenv(storeVariable), defaultStore)
}

// checkGlobalFlags holds for every command what none looks at itself.
func checkGlobalFlags(c *cli.Context) error {
	if store := storePath(c); store == "" || strings.HasPrefix(store, ":") {
		return usagef("--store %q: want the name of a file", store)
	}
	if kernel := os.Getenv(kernelVariable); kernel != "" {
		if err := pipeline.UseKernel(kernel); err != nil {
			return usagef("%s: %w", kernelVariable, err)
		}
	}
	_, err := newLogger(c)
	return err
}

// newLogger returns the logger that --log and --quiet ask for.
func newLogger(c *cli.Context) (*slog.Logger, error) {
	options := &slog.HandlerOptions{Level: slog.LevelInfo}
	if c.Bool("quiet") {
		options.Level = slog.LevelError
	}
	switch c.String("log") {
	case "text":
		return slog.New(slog.NewTextHandler(c.App.ErrWriter, options)), nil
	case "json":
		return slog.New(slog.NewJSONHandler(c.App.ErrWriter, options)), nil
	}
	return nil, usagef("--log %s: want text or json", c.String("log"))
}

// holder is this process as a lock names it.
func holder(since time.Time) db.Holder {
	host, err := os.Hostname()
	if err != nil {
		host = "of unknown name" // no reason not to work
	}
	words := []string{"swaybook"}
	for _, word := range os.Args[1:] {
		words = append(words, cluster.Quote(word))
	}
	return db.Holder{PID: os.Getpid(), Host: host, Since: since, Command: strings.Join(words, " ")}
}

// noArguments refuses words that a command would silently ignore.
func noArguments(c *cli.Context) error {
	if c.Args().Present() {
		return usagef("%s takes no arguments, found %q", c.Command.FullName(), c.Args().First())
	}
	return nil
}

// withStore opens the store for reading around f.
func withStore(c *cli.Context, f func(ctx context.Context, store *db.Store) error) error {
	return withStoreAt(c, storePath(c), f)
}

// withStoreAt is withStore of a store at a path.
func withStoreAt(c *cli.Context, path string, f func(ctx context.Context, store *db.Store) error) error {
	store, err := db.Open(c.Context, path, pipeline.SolverVersion)
	if errors.Is(err, db.ErrNoStore) {
		return explainNoStore(err, path)
	}
	if err != nil {
		return err
	}
	defer store.Close()
	err = f(c.Context, store)
	if why := store.Unkept(); why != nil && !c.Bool("quiet") {
		fmt.Fprintf(c.App.ErrWriter, "note: ordinates computed off the grid are not kept for later questions: %v\n", why)
	}
	return err
}

// withLockedStore opens a store that is there for writing around f, as the only run on it.
func withLockedStore(c *cli.Context, f func(ctx context.Context, store *db.Store) error) error {
	path := storePath(c)
	if err := db.MustExist(path); err != nil { // before it has a lock
		return explainNoStore(err, path)
	}
	return lockedAt(c.Context, path, time.Now(), pipeline.SolverVersion, func(store *db.Store) error { return f(c.Context, store) })
}

// lockedAt opens the store at a path, which is made where there is none, for writing around f,
// as the only run on it. The solver is that of db.Create.
func lockedAt(ctx context.Context, path string, started time.Time, solver string, f func(store *db.Store) error) (err error) {
	lock, err := db.TakeLock(ctx, path, holder(started))
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, lock.Release()) }()
	_, err = createdAt(ctx, path, solver, f)
	return err
}

// createdAt is lockedAt for who has the lock. A store that was not there does not stay where f
// fails before anything has come into it, which isGone says.
func createdAt(ctx context.Context, path, solver string, f func(store *db.Store) error) (isGone bool, err error) {
	_, errBefore := os.Stat(path)
	store, err := db.Create(ctx, path, solver)
	if err != nil {
		return false, err
	}
	err = f(store)
	if err != nil && errors.Is(errBefore, fs.ErrNotExist) {
		var errBlank error
		isGone, errBlank = store.IsBlank(context.WithoutCancel(ctx))
		err = errors.Join(err, errBlank)
	}
	if err = errors.Join(err, store.Close()); isGone {
		err = errors.Join(err, db.Remove(path))
	}
	return isGone, err
}

// explainNoStore says how to make a store.
func explainNoStore(err error, path string) error {
	return fmt.Errorf("%w; make one with: swaybook --store %s ingest PATH", err, path)
}

// The periods that a grid may have, in s: beyond them lie mistakes in the unit.
const (
	shortestPeriod = 1e-3
	longestPeriod  = 1e3
)

// periodList reads a list of periods such as "0.1,0.2s,800ms" or, after @, from
// a file of periods separated by blanks, commas or lines, with # comments. A bare
// number is in s. The result is sorted.
func periodList(text string) ([]float64, error) {
	words, err := listWords(text)
	if err != nil {
		return nil, err
	}
	if len(words) == 0 {
		return nil, usagef("--periods: the list is empty")
	}
	periods, err := query.ParsePeriods(strings.Join(words, ","))
	if err != nil {
		return nil, err
	}
	for _, t := range periods {
		if t < shortestPeriod || t > longestPeriod {
			return nil, usagef("--periods: %g s is outside %g to %g s", t, shortestPeriod, longestPeriod)
		}
	}
	return sortedSet("--periods", periods)
}

// dampingList reads damping ratios such as "0,2%,0.05", sorted.
func dampingList(text string) ([]float64, error) {
	words, err := listWords(text)
	if err != nil {
		return nil, err
	}
	dampings := make([]float64, len(words))
	for i, w := range words {
		if dampings[i], err = query.ParseDamping(w); err != nil {
			return nil, err
		}
	}
	return sortedSet("--dampings", dampings)
}

func listWords(text string) ([]string, error) {
	if name, isFile := strings.CutPrefix(text, "@"); isFile {
		data, err := os.ReadFile(name)
		if err != nil {
			return nil, fmt.Errorf("read list: %w", err)
		}
		text = withoutComments(string(data))
	}
	return strings.FieldsFunc(text, func(r rune) bool { return strings.ContainsRune(", \t\r\n;", r) }), nil
}

func withoutComments(text string) string {
	var out strings.Builder
	for line := range strings.Lines(text) {
		line, _, _ = strings.Cut(line, "#")
		out.WriteString(line + "\n")
	}
	return out.String()
}

func sortedSet(flag string, values []float64) ([]float64, error) {
	if len(values) == 0 {
		return nil, usagef("%s: the list is empty", flag)
	}
	slices.Sort(values)
	for i := range values[1:] {
		if values[i] == values[i+1] {
			return nil, usagef("%s: %g stands twice in the list", flag, values[i])
		}
	}
	return values, nil
}

// printer writes lines and keeps the first error.
type printer struct {
	w   io.Writer
	err error
}

func (p *printer) printf(format string, args ...any) {
	if p.err == nil {
		_, p.err = fmt.Fprintf(p.w, format, args...)
	}
}
