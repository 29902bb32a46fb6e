# Sourced by run.sh of generator/ and tests/: makes the environment once, and brings what the PDF needs.
# Afterwards $python is the interpreter of the environment. Everything it says goes to stderr.

root=$(CDPATH='' cd -- "$(dirname -- "$0")/.." && pwd)
venv="$root/.venv"
python="$venv/bin/python"
pango="libpango-1.0-0 libpangoft2-1.0-0 libharfbuzz-subset0"

say() { printf '%s\n' "$*" >&2; }

as_root() {
    if [ "$(id -u)" = 0 ]; then "$@"; else sudo -n "$@"; fi
}

have_pango() {
    "$python" -c 'import ctypes; [ctypes.CDLL(f"lib{n}") for n in
        ("pango-1.0.so.0", "pangoft2-1.0.so.0", "harfbuzz-subset.so.0")]' 2>/dev/null
}

debian() {  # debian PACKAGE...: install Debian packages, as root or by sudo without a question
    command -v apt-get >/dev/null 2>&1 || return 1
    as_root apt-get install -y -qq --no-install-recommends "$@" >/dev/null 2>&1 && return 0
    as_root apt-get update -qq >/dev/null 2>&1 || return 1
    as_root apt-get install -y -qq --no-install-recommends "$@" >/dev/null 2>&1
}

make_environment() {
    stamp=$(cat "$root/pyproject.toml" "$root/generator/requirements.lock" | cksum)
    [ -f "$venv/stamp" ] && [ "$(cat "$venv/stamp")" = "$stamp" ] && return 0
    say "Making the environment in .venv (once; about a minute) ..."
    if ! python3 -m venv "$venv" 2>/dev/null; then
        debian python3-venv && python3 -m venv "$venv" || {
            say "Python can't make an environment here. Give:  apt-get install python3-venv"
            exit 1
        }
    fi
    "$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))' || {
        say "beforehand needs Python 3.11 or newer; python3 here is $("$python" -V)."
        exit 1
    }
    "$python" -m pip install --quiet --disable-pip-version-check uv >&2 || exit 1
    "$venv/bin/uv" pip install --quiet --python "$python" --require-hashes -r "$root/generator/requirements.lock" >&2 || exit 1
    "$venv/bin/uv" pip install --quiet --python "$python" --no-deps -e "$root" >&2 || exit 1
    printf '%s' "$stamp" >"$venv/stamp"
}

bring_pango() {
    have_pango && return 0
    say "Bringing Pango, which draws the text of the PDF ..."
    # shellcheck disable=SC2086 -- three words are meant
    debian $pango && have_pango && return 0
    if [ "$(uname)" = Darwin ]; then
        say "No PDF without Pango. Give:  brew install pango   (everything else works)"
    else
        say "No PDF without Pango. Give:  sudo apt-get install $pango   (everything else works)"
    fi
}

make_environment
bring_pango
