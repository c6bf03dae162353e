#!/bin/sh
# Submits the shards and what combines them when all are full. With an argument, such as 3 or
# 2,5-7, only these shards are filled again.
set -eu
cd -- "$(dirname -- "$0")"
tasks=${1:-1-4}
shards=$(sbatch --parsable --array="$tasks" shards.sh)
combine=$(sbatch --parsable --dependency="afterok:${shards%%;*}" combine.sh)
printf 'shards: job %s\ncombine: job %s\n' "${shards%%;*}" "${combine%%;*}"
