# Sourced by deploy/try and tests/run after they have set `root` to the clone's folder.
# Makes .venv there and installs Vanner into it. Messages go to stderr, so that stdout stays
# that of the program that is run in the end.
# shellcheck shell=sh

venv="$root/.venv"
# Says what was installed last and from what, so that a second run need not install again.
stamp="$venv/vanner-installed"

say() {
    printf '%s\n' "$*" >&2
}

# usable_python COMMAND: is it a Python 3.11 or later that can make a virtual environment?
# (Debian's python3 lacks ensurepip until python3-venv is installed.)
usable_python() {
    "$1" -c 'import sys, ensurepip, venv; sys.exit(sys.version_info < (3, 11))' >/dev/null 2>&1
}

# find_python: print the Python to use: PYTHON where that is set, else the first that will do.
find_python() {
    if [ -n "${PYTHON:-}" ]; then
        if usable_python "$PYTHON"; then
            printf '%s\n' "$PYTHON"
            return 0
        fi
        say "PYTHON=$PYTHON is no Python 3.11 or later with venv: name another, or unset PYTHON."
        return 1
    fi
    for candidate in python3 python3.13 python3.12 python3.11; do
        if usable_python "$candidate"; then
            printf '%s\n' "$candidate"
            return 0
        fi
    done
    say "No Python 3.11 or later with venv was found: install one (on Debian: apt-get install" \
        "python3 python3-venv) or name one, as in PYTHON=/path/to/python3."
    return 1
}

python_version() {
    "$1" -c 'import sys; print(sys.version)' 2>/dev/null
}

# venv_works: does .venv hold a Python that runs, is recent enough, is the one that PYTHON asks
# for, and has its own pip? A clone that was moved or copied fails the last: the programs in
# .venv/bin begin with the old path.
venv_works() {
    [ -x "$venv/bin/python" ] && usable_python "$venv/bin/python" || return 1
    if [ -n "${PYTHON:-}" ]; then
        [ "$(python_version "$PYTHON")" = "$(python_version "$venv/bin/python")" ] || return 1
    fi
    pip_by_path=$("$venv/bin/pip" --version 2>/dev/null) || return 1
    [ "$pip_by_path" = "$("$venv/bin/python" -m pip --version 2>/dev/null)" ]
}

# make_venv: make .venv where it is absent or broken.
make_venv() {
    if venv_works; then
        return 0
    fi
    python=$(find_python) || return 1
    say "Making .venv with $("$python" --version 2>&1)."
    "$python" -m venv --clear "$venv" || {
        say "$venv could not be made: see the message above; is the disk full or read-only?"
        return 1
    }
}

# fingerprint KIND: print what an installation of that kind depends on, as a checksum. A wheel
# is a copy of the sources, so for it they count as well. Fails where .venv has no Python.
fingerprint() {
    version=$(python_version "$venv/bin/python") || return 1
    sources=
    [ "$1" = editable ] || sources='service migrations'
    (
        cd "$root" || exit 1
        printf '%s\n' "$version"
        pwd -P
        # shellcheck disable=SC2086 # the names hold no spaces and none of them may be a word
        find pyproject.toml deploy/constraints.txt $sources \
            -type f ! -name '*.pyc' -exec cksum {} + | LC_ALL=C sort
    ) | cksum
}

# installed KIND: is that kind installed, from what the clone holds now?
installed() {
    [ -f "$stamp" ] && [ -x "$venv/bin/vanner" ] || return 1
    if [ -n "${PYTHON:-}" ]; then
        [ "$(python_version "$PYTHON")" = "$(python_version "$venv/bin/python")" ] || return 1
    fi
    current=$(fingerprint "$1") && [ "$(cat "$stamp")" = "$1 $current" ]
}

# install KIND ARGUMENTS...: install with pip, with the pinned versions, and say so in the stamp.
install() {
    kind=$1
    shift
    make_venv || return 1
    rm -f "$stamp"
    say "Installing Vanner and its libraries into .venv; the first time this takes a minute or two."
    (
        cd "$root" && exec "$venv/bin/python" -m pip install --quiet --disable-pip-version-check \
            --constraint deploy/constraints.txt "$@"
    ) || {
        say "pip could not install Vanner: see its message above; is the package index reachable?"
        return 1
    }
    printf '%s\n' "$kind $(fingerprint "$kind")" >"$stamp"
}

# set_up_to_use: have `vanner` in .venv. An up-to-date editable installation runs the same code,
# so a developer's .venv is left as it is.
set_up_to_use() {
    installed editable || installed wheel || install wheel .
}

# set_up_to_test: have Vanner in .venv from the sources in place, and the tools of the checks.
set_up_to_test() {
    installed editable || install editable --editable '.[test]'
}
