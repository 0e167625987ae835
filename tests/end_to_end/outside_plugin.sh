#!/usr/bin/env bash
# Installs the build, builds a plug-in out of the tree against the installed package, and runs a
# pipeline with its step through the installed program.
#   outside_plugin.sh BUILD SOURCE WORK
set -euo pipefail
build=$1 source=$2 work=$3
rm -rf "$work"
mkdir -p "$work"

cmake --install "$build" --prefix "$work/installed" > "$work/install.log"
cmake -G Ninja -S "$source/tests/pipelines/outside" -B "$work/plugin" \
  -DCMAKE_PREFIX_PATH="$work/installed" > "$work/configure.log"
cmake --build "$work/plugin" > "$work/build.log"

"$work/installed/bin/wavefount" demo "$work/demo" --frames 6 --view-um 500 --scenario thin-interior
sed 's/^  - find-nuclei$/  - flag-bright-frames: {limit_counts: 1}\n  - find-nuclei/' \
  "$work/installed/share/wavefount/pipelines/extract-tube.yaml" > "$work/pipeline.yaml"
"$work/installed/bin/wavefount" steps flag-bright-frames --plugins "$work/plugin"

# Every frame is brighter than one count, so the plug-in's step must leave out the whole film.
status=0
"$work/installed/bin/wavefount" run "$work/pipeline.yaml" "$work/demo/films" \
  --out "$work/results" --plugins "$work/plugin" > "$work/run.log" || status=$?
cat "$work/run.log"
[ "$status" -eq 1 ]
grep -q "brighter than the plug-in's limit" "$work/run.log"
