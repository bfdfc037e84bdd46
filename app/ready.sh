#!/usr/bin/env bash
# Runs a command in the project's own virtual environment, and first does what is missing for it:
#   bash app/ready.sh lamwright assess designs/demo_24s4p_arc.toml --out out/demo
#   bash app/ready.sh pytest
# Safe to repeat: with nothing to do it costs some hundredths of a second. PYTHON=/path/to/python3
# chooses the interpreter of a new environment. It prints on standard error only, and ends with the
# command's exit code, or with 4 where the set-up failed. Written for the bash 3.2 of macOS.
# shellcheck disable=SC2086  # lists of packages and file patterns are split on purpose
set -eu

root=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd -P)
venv=$root/.venv
# What gmsh's library needs from the system, even where it opens no window.
gmsh_packages="libglu1-mesa libgl1 libxft2 libxcursor1 libxfixes3 libxinerama1 libxrender1"
gmsh_packages="$gmsh_packages libfontconfig1 libgomp1"

say() { printf 'ready: %s\n' "$*" >&2; }
give_up() { say "$*"; exit 4; }

# Run a step without its output; if it fails, show the last lines of that.
quietly() {
    local log status=0
    log=$(mktemp)
    "$@" >"$log" 2>&1 </dev/null || status=$?
    [ "$status" -eq 0 ] || tail -n 15 "$log" >&2
    rm -f "$log"
    return "$status"
}

# Install Debian packages as root or through sudo, or say what an administrator has to type.
apt_install() {
    local as_root=""
    local by_hand="please install these with your system's package manager: $*"
    command -v apt-get >/dev/null || give_up "$by_hand"
    by_hand="please run this as root, or have it run, then try again: apt-get install -y $*"
    if [ "$(id -u)" -ne 0 ]; then
        command -v sudo >/dev/null || give_up "$by_hand"
        as_root="sudo"
        # Without a terminal nobody can type a password; with one, ask before output is hidden.
        if [ -t 0 ]; then sudo -v || give_up "$by_hand"; else as_root="sudo -n"; fi
    fi
    say "installing system packages: $*"
    export DEBIAN_FRONTEND=noninteractive
    quietly $as_root apt-get update -qq || say "the package lists could not be renewed; going on"
    quietly $as_root apt-get install -y -qq --no-install-recommends "$@" || give_up "$by_hand"
}

is_new_enough() { "$1" -c 'import sys; sys.exit(sys.version_info < (3, 11))' >/dev/null 2>&1; }

find_python() {
    local name
    for name in ${PYTHON:+"$PYTHON"} python3 python3.13 python3.12 python3.11 python; do
        if is_new_enough "$name"; then command -v "$name"; return; fi
        [ "$name" != "${PYTHON:-}" ] || return 1
    done
    return 1
}

# Where the system's list of libraries has no GLU, gmsh cannot be loaded: known before it is fetched.
without_glu() {
    [ "$(uname -s)" = Linux ] && command -v apt-get >/dev/null || return 1
    ! PATH="$PATH:/usr/sbin:/sbin" ldconfig -p 2>/dev/null | grep -q "libGLU\.so\.1"
}

make_venv() {
    local python version packages=""
    python=$(find_python) || give_up "Python 3.11 or later is needed${PYTHON:+, $PYTHON is not};" \
        "install it, or name it: PYTHON=/path/to/python3 bash app/ready.sh ..."
    if ! "$python" -c 'import venv, ensurepip' >/dev/null 2>&1; then
        version=$("$python" -c 'import sys; print("%d.%d" % sys.version_info[:2])')
        packages="python$version-venv"
    fi
    if without_glu; then packages="$packages $gmsh_packages"; fi
    # All at once: who has to ask an administrator asks once, and before minutes of downloads.
    [ -z "$packages" ] || apt_install $packages
    say "making .venv with $("$python" -V)"
    quietly "$python" -m venv --clear "$venv" || give_up "the virtual environment could not be made"
}

install() {
    # Compiling all libraries takes 20 s, half of the set-up; Python compiles what it imports.
    local compile=--no-compile
    [ -z "${PYTHONDONTWRITEBYTECODE:-}" ] || compile=--compile
    quietly "$venv/bin/python" -m pip install -q --disable-pip-version-check --no-input $compile \
        -c "$root/constraints.txt" "$@"
}

# Install the project and, for a developer's command, the tools; once for each state of the files.
install_project() {
    local stamp=$venv/ready-$1 state
    state=$(cat "$root/pyproject.toml" "$root/constraints.txt" | cksum)
    [ "$(cat "$stamp" 2>/dev/null)" != "$state" ] || return 0
    if [ "$1" = core ]; then
        say "installing lamwright and its libraries"
        install -e "$root" || give_up "the installation failed"
    else
        say "installing the tools for tests"
        # The second finite element library has no wheel for some systems; its tests then skip.
        install --only-binary ngsolve,netgen-mesher,netgen-occt -e "${root}[dev,independent,cluster]" ||
            install -e "${root}[dev,cluster]" || give_up "the installation failed"
        printf '%s\n' "$state" >"$venv/ready-core"
    fi
    # Where Python may not keep what it compiles, it would compile our modules at every start.
    if [ -n "${PYTHONDONTWRITEBYTECODE:-}" ]; then
        quietly "$venv/bin/python" -m compileall -q "$root/geometry" "$root/solver" \
            "$root/postprocess" "$root/app" || true
    fi
    printf '%s\n' "$state" >"$stamp"
}

lacks() { [ "$(uname -s)" = Linux ] && ldd $1 2>/dev/null | grep -q "$2.*not found"; }

# Install the system packages named last, if the libraries in files `$1` lack one like `$2`.
complete() {
    lacks "$1" "$2" || return 0
    local files=$1 missing=$2
    shift 2
    apt_install "$@"
    if lacks "$files" "$missing"; then give_up "still missing: ldd $files | grep 'not found'"; fi
}

[ $# -gt 0 ] || give_up "usage: bash app/ready.sh COMMAND [ARGUMENT ...], such as lamwright or pytest"
# A moved or half-made environment is made anew: its scripts hold the path they were made at.
if ! "$venv/bin/python" -c '' 2>/dev/null || ! grep -qsF "$venv/bin" "$venv/bin/pip"; then make_venv; fi
case $1 in
    pytest | ruff | mypy) install_project dev ;;
    *) install_project core ;;
esac
cd "$venv"
complete "lib/libgmsh.so*" "" $gmsh_packages
if [ "$1" = pytest ]; then  # for some tests alone, which are skipped where it cannot be had
    (complete "lib/python3*/site-packages/ngsolve_openblas/libgfortran.so*" libquadmath libquadmath0) ||
        say "without it the tests of tests/independent are skipped"
fi
cd "$OLDPWD"
export VIRTUAL_ENV=$venv PATH="$venv/bin:$PATH"
exec "$@"
