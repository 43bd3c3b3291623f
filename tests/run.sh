#!/bin/sh
# Runs every test: sh tests/run.sh [pytest arguments]
# Makes the environment with the test tools, OpenGL and the virtual display first.
set -eu
cd "$(dirname "$0")/.."
. .ci/environment.sh

make_environment "[test]"
make_graphics_ready
if [ "$(uname -s)" = Linux ]; then
    for tool in Xvfb:xvfb xdotool:xdotool xwininfo:x11-utils import:imagemagick pdftoppm:poppler-utils; do
        command -v "${tool%%:*}" >/dev/null 2>&1 || install_system "the tests (${tool%%:*})" "${tool##*:}"
    done
fi
say "running the tests"
exec .venv/bin/python -m pytest "$@"
