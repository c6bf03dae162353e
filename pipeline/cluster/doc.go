// Package cluster writes the job files by which a scheduler fills the shards of a study's
// store, each by a task of its own, and combines them when all are full.
//
// Jobs says what the files are filled in with; Slurm and Kubernetes make them. What they
// write is complete: paths are absolute and quoted for who reads them, and nothing is looked
// up when a job runs. Files are returned, not written.
package cluster
