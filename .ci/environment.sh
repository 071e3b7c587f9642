# Makes a private Python environment for a script of this project. Sourced, not run.
#
# use_environment NAME EXTRAS: makes .venv-NAME in the checkout when it is missing or out of date,
# with the project installed in it, and sets $bin to the folder of its commands.
# Expects $root, the checkout.

say() {
    printf '%s\n' "$*" >&2
}

give_up() {
    for line in "$@"; do
        say "$line"
    done
    exit 1
}

# Sets $python to a Python that is new enough.
find_python() {
    for python in python3 python3.14 python3.13 python3.12 python3.11 python; do
        if "$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))' >/dev/null 2>&1; then
            return
        fi
    done
    give_up "Python 3.11 or later is missing: none of the commands python3, python3.11 to python3.14, python is one." \
        "Install it (for example from python.org or with your system's package manager) and run this again."
}

use_environment() {
    environment="$root/.venv-$1"
    # An environment knows where it stands and what it was asked for: moved or asked for more, it is made anew.
    wanted="$environment $2 $(cksum <"$root/pyproject.toml")"
    bin="$environment/bin"
    if [ -f "$environment/made-for" ] && [ "$(cat "$environment/made-for")" = "$wanted" ] &&
        "$bin/python" -c '' >/dev/null 2>&1; then
        return
    fi
    find_python
    "$python" -c 'import venv, ensurepip' >/dev/null 2>&1 ||
        give_up "The modules venv and ensurepip of $python are missing." \
            "On Debian and Ubuntu: apt install python3-venv. Then run this again."
    say "Making a private Python environment in $environment (once; some minutes)."
    rm -rf "$environment"
    "$python" -m venv "$environment" ||
        give_up "The environment could not be made in $root: is the folder writable and the disk not full?"
    "$bin/python" -m pip install --quiet --disable-pip-version-check --editable "$root$2" ||
        give_up "The libraries could not be installed; the lines above say why." \
            "The first run needs a network that reaches the Python package index (pypi.org), or a mirror named in pip's settings."
    printf '%s' "$wanted" >"$environment/made-for"
}
