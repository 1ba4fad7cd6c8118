#!/bin/sh
# Makes the virtual environment .venv beside this file, installs fabgen into it, then runs the given command in it:
#   sh setup.sh fabgen pack templates/hydrogen-wire.toml -o hydrogen-pack
#   sh setup.sh pytest
set -eu
home=$(CDPATH='' cd -- "$(dirname -- "$0")" && pwd)
python=${PYTHON:-python3}
fail() { printf 'setup.sh: %s\n' "$1" >&2; exit 2; }

[ $# -gt 0 ] || fail "give a command to run, for example: sh setup.sh fabgen --help"
command -v "$python" >/dev/null || fail "$python is not installed; install Python 3.11 or later"
"$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))' ||
    fail "$("$python" --version) is too old; install Python 3.11 or later, or name it: PYTHON=python3.11 sh setup.sh ..."

case "$1" in
    fabgen) what=$home kind=run ;;
    *) what="$home[dev]" kind=dev ;;
esac
venv=$home/.venv
mark=$venv/.installed-$kind
if ! [ -e "$mark" ] || [ -n "$(find "$home/pyproject.toml" "$home/fabgen" "$home/templates" -newer "$mark" -type f \
    ! -path '*/__pycache__/*' | head -n 1)" ]; then
    printf 'setup.sh: making %s and installing fabgen (about 1.5 GB, some minutes the first time)\n' "$venv" >&2
    [ -x "$venv/bin/python" ] || "$python" -m venv "$venv" ||
        fail "$python cannot make a virtual environment; on Debian: apt-get install python3-venv"
    rm -rf "$home/build"
    "$venv/bin/python" -m pip install --quiet --disable-pip-version-check "$what" || fail "the installation failed"
    touch "$mark"
fi
if ! trouble=$("$venv/bin/python" -c 'import OCP.gp, netgen.occ' 2>&1); then
    case "$trouble" in
        *lib*"cannot open shared object"*)
            packages="libgl1 libxext6 libsm6 libexpat1"
            if [ "$(id -u)" = 0 ] && command -v apt-get >/dev/null; then
                printf 'setup.sh: installing the system libraries %s\n' "$packages" >&2
                { apt-get update -qq && apt-get install -y -qq $packages; } >&2 || fail "apt-get install $packages failed"
            else
                missing=$(printf '%s' "$trouble" | grep -o 'lib[^ :]*\.so[.0-9]*' | head -n 1)
                fail "the system library $missing is missing; run: sudo apt-get install $packages"
            fi ;;
        *) fail "a library does not load: $(printf '%s' "$trouble" | tail -n 1)" ;;
    esac
fi
PATH=$venv/bin:$PATH
export PATH
exec "$@"
