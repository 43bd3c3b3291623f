# Shared by ui/start.sh and tests/run.sh: the Python environment in .venv and the system's own libraries.
# POSIX sh; sourced with the project's root as working directory. Says what it does; doing it twice changes nothing.

say() { printf '%s\n' "planner: $*"; }

fail() {
    printf '%s\n' "planner: $*" >&2
    exit 1
}

# Runs a command as the administrator: directly as root, through sudo where it asks no password.
as_admin() {
    if [ "$(id -u)" = 0 ]; then
        "$@"
    else
        sudo -n "$@"
    fi
}

may_install() {
    command -v apt-get >/dev/null 2>&1 || return 1
    [ "$(id -u)" = 0 ] || { command -v sudo >/dev/null 2>&1 && sudo -n true 2>/dev/null; }
}

# install_system WHY PACKAGE...: by apt-get where that is allowed, else prints the exact line and stops.
install_system() {
    why=$1
    shift
    if may_install; then
        say "installing for $why: $*"
        as_admin env DEBIAN_FRONTEND=noninteractive apt-get install -y -q --no-install-recommends "$@" >/dev/null 2>&1 ||
            { as_admin apt-get update -q >/dev/null 2>&1 &&
                as_admin env DEBIAN_FRONTEND=noninteractive apt-get install -y -q --no-install-recommends "$@" >/dev/null; } ||
            fail "the system did not install $*. Install it by hand, then run this again."
    else
        fail "missing for $why. Run this line, then start again:  sudo apt-get install --no-install-recommends $*"
    fi
}

find_python() {
    for candidate in ${PLANNER_PYTHON:-} python3.13 python3.12 python3.11 python3; do
        if "$candidate" -c 'import sys; sys.exit(not (3, 11) <= sys.version_info[:2] <= (3, 13))' 2>/dev/null; then
            printf '%s\n' "$candidate"
            return 0
        fi
    done
    return 1
}

# make_environment EXTRAS: .venv with the project and EXTRAS ("" or "[test]"), made anew only when pyproject.toml changed.
make_environment() {
    extras=$1
    if ! .venv/bin/python -m pip --version >/dev/null 2>&1; then
        python=$(find_python) || fail "Python 3.11, 3.12 or 3.13 is needed and was not found."
        say "making the Python environment in .venv with $($python --version 2>&1)"
        rm -rf .venv
        if ! "$python" -m venv .venv >/dev/null 2>&1; then
            rm -rf .venv
            version=$("$python" -c 'import sys; print("%d.%d" % sys.version_info[:2])')
            install_system "Python's venv module" "python$version-venv"
            "$python" -m venv .venv || fail "Python could not make an environment in .venv."
        fi
    fi
    stamp=".venv/installed$(printf '%s' "$extras" | tr -d '[],')"
    if [ "$(cat "$stamp" 2>/dev/null)" != "$(cksum <pyproject.toml)" ]; then
        say "installing the planner and what it needs into .venv"
        .venv/bin/python -m pip install -q --disable-pip-version-check -e ".$extras" ||
            fail "the packages could not be installed; is the package index reachable?"
        cksum <pyproject.toml >"$stamp"
    fi
}

has_library() {
    .venv/bin/python -c "import ctypes; ctypes.CDLL('$1')" 2>/dev/null
}

# OpenGL for the screens. Only Linux needs it from the system.
make_graphics_ready() {
    [ "$(uname -s)" = Linux ] || return 0
    if ! has_library libEGL.so.1 || ! has_library libGL.so.1 || ! has_library libmtdev.so.1; then
        install_system "drawing the screens (OpenGL)" libegl1 libgl1 libgl1-mesa-dri libmtdev1
        has_library libGL.so.1 || fail "libGL.so.1 is still missing after the installation."
    fi
}
