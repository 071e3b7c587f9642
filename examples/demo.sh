#!/bin/sh
# Solves a small invented project: sh examples/demo.sh [FOLDER]
set -eu
root=$(CDPATH='' cd -- "$(dirname -- "$0")/.." && pwd)
. "$root/.ci/environment.sh"
use_environment demo ""

folder=${1:-"$root/examples/demo-project"}
if [ ! -e "$folder/stack.toml" ]; then
    "$bin/photonfate" start "$folder"
fi
"$bin/photonfate" solve "$folder/stack.toml"
