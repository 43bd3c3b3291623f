#!/bin/sh
# Opens the planner on the demo case: sh ui/start.sh [CASE.json]
# Makes the environment first. Without a display it runs the demo without a window and says where it wrote.
set -eu
cd "$(dirname "$0")/.."
. .ci/environment.sh

make_environment ""
make_graphics_ready

if [ "$(uname -s)" = Linux ] && [ -z "${DISPLAY:-}" ] && [ -z "${WAYLAND_DISPLAY:-}" ]; then
    folder=${PLANNER_DEMO_DIR:-build/demo}
    say "there is no display here (DISPLAY and WAYLAND_DISPLAY are empty), so the demo runs without a window"
    .venv/bin/python -m planner demo --out "$folder"
    .venv/bin/python -m ui --pictures "$folder/screens"
    say "plan, papers and one picture of each screen are in $folder"
else
    say "opening the planner"
    exec .venv/bin/python -m ui --demo "$@"
fi
