#!/bin/sh
# Sets Linewright up on a machine with Python 3.11 or newer, then does one of two jobs:
#   sh app/setup.sh run     identifies the lines of a sample spectrum and prints the first rows
#   sh app/setup.sh test    runs the tests (arguments after 'test' go to pytest)
# Both use the virtual environment .venv of this checkout and make it when it is missing.
set -eu

here=$(CDPATH= cd -- "$(dirname -- "$0")/.." && pwd)
job=${1:-}
[ $# -gt 0 ] && shift
case "$job" in
run | test) ;;
*)
    echo "usage: sh app/setup.sh run | test" >&2
    exit 2
    ;;
esac
cd "$here"

find_python() {
    for name in ${PYTHON:-} python3 python3.13 python3.12 python3.11; do
        if command -v "$name" >/dev/null 2>&1 && "$name" -c \
            'import sys; sys.exit(sys.version_info < (3, 11))' >/dev/null 2>&1; then
            command -v "$name"
            return
        fi
    done
    echo "Python 3.11 or newer is missing: apt-get install -y python3 python3-venv" >&2
    exit 3
}

# Debian packages that are missing, one line; empty where nothing is or no Debian names apply.
missing_packages() {
    "$python" - "$job" <<'PY'
import importlib.util
import sys

packages = []
if any(importlib.util.find_spec(name) is None for name in ("ensurepip", "venv")):
    packages.append("python3-venv")
if sys.platform.startswith("linux"):
    sys.dont_write_bytecode = True
    sys.path.insert(0, "app/linewright/window")
    import needs

    packages += needs.missing_packages({"QT_QPA_PLATFORM": "xcb"})
print(" ".join(packages))
PY
}

# Installs with apt as root (or with sudo where it asks nothing); quiet and without input.
install_packages() {
    as_root=
    if [ "$(id -u)" != 0 ]; then
        command -v sudo >/dev/null 2>&1 && sudo -n true 2>/dev/null || return 1
        as_root="sudo -n"
    fi
    command -v apt-get >/dev/null 2>&1 || return 1
    log=$(mktemp)
    for step in update "install -y --no-install-recommends $1"; do
        if ! $as_root env DEBIAN_FRONTEND=noninteractive apt-get -q \
            -o DPkg::Lock::Timeout=120 $step >"$log" 2>&1 </dev/null && [ "$step" != update ]; then
            tail -n 5 "$log" >&2
            rm -f "$log"
            return 1
        fi
    done
    rm -f "$log"
}

python=$(find_python) || exit 3
missing=$(missing_packages)
if [ -n "$missing" ]; then
    echo "System packages missing: $missing (Debian: apt-get install -y $missing)" >&2
    install_packages "$missing" || true
    missing=$(missing_packages)
fi
case " $missing " in
*" python3-venv "*)
    echo "Cannot go on without them." >&2
    exit 3
    ;;
esac
if [ -n "$missing" ] && [ "$job" = test ]; then
    offscreen=$("$python" -c 'import sys; sys.dont_write_bytecode = True
sys.path.insert(0, "app/linewright/window")
import needs; print(" ".join(needs.missing_packages({"QT_QPA_PLATFORM": "offscreen"})))')
    if [ -n "$offscreen" ]; then
        echo "The tests of the window need them." >&2
        exit 3
    fi
fi

# A changed pyproject.toml, another Python or a moved checkout means setting up again.
stamp=$("$python" -c 'import hashlib, pathlib, sys
data = pathlib.Path("pyproject.toml").read_bytes() + sys.version.encode() + sys.argv[1].encode()
print(hashlib.sha256(data).hexdigest())' "$here")
have() { [ -x .venv/bin/python ] && [ "$(cat ".venv/stamp-$1" 2>/dev/null)" = "$stamp" ]; }

if ! have test && ! { [ "$job" = run ] && have run; }; then
    # An environment of another stamp is made afresh; 'test' adds to what 'run' has made.
    have run || "$python" -m venv --clear .venv
    echo "Setting up .venv (once; about half a minute) ..."
    extra=
    [ "$job" = test ] && extra='[test]'
    .venv/bin/python -m pip install --quiet --quiet --disable-pip-version-check -e ".$extra" </dev/null
    echo "$stamp" >".venv/stamp-$job"
fi

if [ "$job" = test ]; then
    # The whole suite runs on every core, a file at a time; a chosen part runs plainly.
    [ "$#" -gt 0 ] || set -- -n auto --dist loadfile
    exec .venv/bin/python -m pytest "$@"
fi

out=build/first-run
mkdir -p "$out"
.venv/bin/linewright solve sample_spectra/g_dwarf.fits \
    --session "$out/g_dwarf.linewright.json" --force
.venv/bin/linewright table "$out/g_dwarf.linewright.json" --what ledger \
    -o "$out/ledger.csv" --force
.venv/bin/python - "$out/ledger.csv" <<'PY'
import csv
import sys

columns = ("feature", "wave", "depth", "ew", "species", "wave_lab", "velocity", "probability",
           "standing")
with open(sys.argv[1], newline="", encoding="utf-8") as handle:
    rows = list(csv.DictReader(line for line in handle if not line.startswith("#")))


def shown(name, text):
    try:
        return f"{float(text):.8g}" if "wave" in name else f"{float(text):.4g}"
    except ValueError:
        return text


print("".join(f"{name:>12}" for name in columns))
for row in rows[:12]:
    print("".join(f"{shown(name, row[name]):>12}" for name in columns))
print(f"... {len(rows)} rows in all: {sys.argv[1]}")
PY
