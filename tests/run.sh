#!/bin/sh
# Runs the whole test suite: sh tests/run.sh [PYTEST OPTIONS]
set -eu
root=$(CDPATH='' cd -- "$(dirname -- "$0")/.." && pwd)
. "$root/.ci/environment.sh"
use_environment tests "[test,database]"

cd "$root"
# One thread a process: two test processes with a pool of threads each only get into each other's way.
OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1 exec "$bin/python" -m pytest -q -n 2 --benchmark-disable "$@"
