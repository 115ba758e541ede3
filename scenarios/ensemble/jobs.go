package ensemble

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
)

// Jobs are the scripts of a Slurm job array: one task a shard, and a job that
// joins them once all have ended well. A task that runs twice or is requeued does
// no harm: a shard is a function of the plan, and whoever is first gives it its name.
type Jobs struct {
	dir   string
	count int
}

// WriteJobs writes job.sh, gather.sh and submit.sh into the folder of an ensemble.
func WriteJobs(dir, program string, p *Plan, shards int, csv bool) (*Jobs, error) {
	abs, err := filepath.Abs(dir)
	if err != nil {
		return nil, err
	}
	name := p.Scenario.Name
	more := ""
	if csv {
		more = " --csv"
	}
	files := []struct{ name, text string }{
		{"job.sh", fmt.Sprintf(`#!/bin/sh
# One shard of an ensemble for each task of a Slurm job array. Written by cycle.
#SBATCH --job-name=%s
#SBATCH --output=%s
#SBATCH --requeue
#SBATCH --open-mode=append
set -eu
cd %s
exec %s ensemble scenario.toml --members %d --seed %d --design %s --shard "$SLURM_ARRAY_TASK_ID/%d" \
	--workers "${SLURM_CPUS_PER_TASK:-${SLURM_CPUS_ON_NODE:-1}}" --out . --progress plain
`, name, quoted(filepath.Join(abs, "slurm-%A_%a.out")), quoted(abs), quoted(program), p.Members, p.Seed, p.Design, shards)},
		{"gather.sh", fmt.Sprintf(`#!/bin/sh
# Joins the shards of an ensemble. Written by cycle.
#SBATCH --job-name=%s-gather
#SBATCH --output=%s
set -eu
cd %s
exec %s gather .%s
`, name, quoted(filepath.Join(abs, "slurm-%j.out")), quoted(abs), quoted(program), more)},
		{"submit.sh", fmt.Sprintf(`#!/bin/sh
# Submits the job array and, once every task of it has ended well, the joining job.
# Options of sbatch, such as --partition, may be given and hold for both.
set -eu
cd %s
id=$(sbatch --parsable --array=1-%d "$@" job.sh)
id=${id%%%%;*}
sbatch --parsable --dependency=afterok:"$id" --kill-on-invalid-dep=yes "$@" gather.sh >/dev/null
echo "$id"
`, quoted(abs), shards)},
	}
	for _, f := range files {
		if err := WriteFile(dir, f.name, func(w io.Writer) error { _, err := io.WriteString(w, f.text); return err }); err != nil {
			return nil, err
		}
	}
	return &Jobs{abs, shards}, nil
}

// quoted makes a text one word of the shell.
func quoted(s string) string { return "'" + strings.ReplaceAll(s, "'", `'\''`) + "'" }

// Submit hands the jobs to sbatch and returns their numbers.
func (j *Jobs) Submit() ([]string, error) {
	sbatch := func(args ...string) (string, error) {
		c := exec.Command("sbatch", append([]string{"--parsable"}, args...)...)
		c.Dir, c.Env = j.dir, os.Environ()
		var out, msg bytes.Buffer
		c.Stdout, c.Stderr = &out, &msg
		if err := c.Run(); err != nil {
			return "", fmt.Errorf("sbatch: %v: %s", err, strings.TrimSpace(msg.String()))
		}
		id, _, _ := strings.Cut(strings.TrimSpace(out.String()), ";")
		return id, nil
	}
	array, err := sbatch(fmt.Sprintf("--array=1-%d", j.count), "job.sh")
	if err != nil {
		return nil, err
	}
	join, err := sbatch("--dependency=afterok:"+array, "--kill-on-invalid-dep=yes", "gather.sh")
	if err != nil {
		return []string{array}, err
	}
	return []string{array, join}, nil
}
