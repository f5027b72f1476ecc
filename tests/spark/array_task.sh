#!/usr/bin/env bash
# One task of a job array: array_task.sh NUMBER PROGRAM FOLDER OPTION... runs FOLDER/pieces/NUMBER into FOLDER/done.
# Under a scheduler NUMBER is its task number, SLURM_ARRAY_TASK_ID for one.
set -euo pipefail
number=$(printf '%04d' "$1")
program=$2
folder=$3
shift 3
status=0
# Written beside and renamed: a task that was stopped leaves nothing that looks done, and can simply be run again.
"$program" assess "$@" --boulders - --out - --threads 1 --quiet \
  < "$folder/pieces/$number" > "$folder/done/$number.part" || status=$?
# 3: finished, some records could not be assessed; their lines say why.
[ "$status" -eq 0 ] || [ "$status" -eq 3 ] || exit "$status"
mv "$folder/done/$number.part" "$folder/done/$number.ndjson"
