#!/bin/sh
# Combines 4 shards into the store of a study, and asks the study's questions.
#SBATCH --job-name=quays-combine
#SBATCH --kill-on-invalid-dep=yes
#SBATCH --ntasks=1
#SBATCH --cpus-per-task=2
#SBATCH --mem=500M
#SBATCH --output=%x-%j.log
#SBATCH --open-mode=append
#SBATCH --requeue
#SBATCH --signal=B:USR1@60
#SBATCH -plong
#SBATCH "--comment=it's \"10 %\" \\ # $HOME"

# A minute before the time limit Slurm sends USR1 to this script alone. swaybook then stops in
# order, and the job is queued again, to go on with what is stored. TERM goes to all processes
# of a job that is cancelled or over its limit: swaybook has it without this script, which waits.
pid='' code=127 isLimit=no isTold=no
tell() { [ -z "$pid" ] || [ "$isTold" = yes ] || { isTold=yes && kill -TERM "$pid"; }; }
trap 'isCaught=yes isLimit=yes; tell' USR1
trap 'isCaught=yes' TERM

/opt/swaybook reprocess --combine 4 --workers 2 --allow-rejected '/srv/a b/it'\''s "100%" #1: $(HOME) `id` \ *?[x]{y}~!&|;<>	
- é $$ .toml' &
pid=$!
[ "$isLimit" = no ] || tell
while :; do # a signal ends wait early
  isCaught=no
  wait "$pid"
  status=$?
  [ "$status" -eq 127 ] || code=$status # 127: the wait before was for its end
  [ "$isCaught" = yes ] || break
done

# A limit that ten runs do not come to an end in is wrong.
if [ "$code" -eq 130 ] && [ "$isLimit" = yes ] && [ "${SLURM_RESTART_COUNT:-0}" -lt 10 ]; then
  scontrol requeue "$SLURM_JOB_ID" && exit 0
fi
exit "$code"
