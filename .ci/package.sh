#!/bin/sh
# Builds a folder that runs without Python on this platform: sh .ci/package.sh [OUT]; then starts it to see that it draws and saves.
# Made and tried on Linux; on Windows and macOS the same command is untested.
set -eu
cd "$(dirname "$0")/.."
. .ci/environment.sh

out=${1:-build/package}
make_environment "[package]"
make_graphics_ready
say "building the folder in $out"
.venv/bin/python -m PyInstaller --noconfirm --log-level WARN --onedir --windowed --name oxygen-altitude-planner \
    --distpath "$out" --workpath build/package-work --specpath build/package-work --paths . \
    --collect-submodules ui --collect-submodules planner --hidden-import profiles --hidden-import font_source_sans_pro \
    --collect-data planner --collect-data profiles \
    --collect-data font_source_sans_pro --collect-data tzdata --exclude-module tkinter ui/__main__.py

say "trying it: it must start, draw every screen, and keep a case"
trial=$(mktemp -d)
SDL_VIDEODRIVER=offscreen PLANNER_DATA_DIR="$trial/data" \
    "$out/oxygen-altitude-planner/oxygen-altitude-planner" --pictures "$trial/screens" >/dev/null
for screen in cases patient trip forecast oxygen kit papers; do
    [ -s "$trial/screens/$screen.png" ] || fail "the built program did not draw the screen $screen."
done
rm -rf "$trial"
say "the folder $out/oxygen-altitude-planner is ready ($(du -sm "$out" | cut -f1) MB)"
