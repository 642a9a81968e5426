# Read by the other scripts (`.`), from the root of the repository: makes a virtual environment with this checkout in it.
#   install_into FOLDER EXTRAS      e.g. install_into .venv cli,service
# Nothing is done when FOLDER already holds these extras (or `test`, which contains them) for the same pyproject.toml.

find_python() {
  local python="${PYTHON:-python3}"
  if ! command -v "$python" >/dev/null; then
    echo "error: $python was not found; install Python 3.11 or later, or name one: PYTHON=/path/to/python3" >&2
    return 1
  fi
  if ! "$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))'; then
    echo "error: $python is $("$python" -V 2>&1); nearchord needs Python 3.11 or later: PYTHON=/path/to/python3" >&2
    return 1
  fi
  if ! "$python" -c 'import venv, ensurepip' 2>/dev/null; then
    echo "error: $python has no venv module; install it (on Debian: apt-get install python3-venv)" >&2
    return 1
  fi
  echo "$python"
}

install_into() {
  local folder="$1" extras="$2" python state
  state="$(cksum <pyproject.toml) $PWD"
  local have
  for have in "$extras" test; do
    if [[ -x "$folder/bin/python" && "$(cat "$folder/.nearchord-$have" 2>/dev/null)" == "$state" ]]; then
      return 0
    fi
  done
  if [[ ! -x "$folder/bin/python" ]]; then
    python="$(find_python)"
    echo "making $folder ..." >&2
    "$python" -m venv "$folder"
  fi
  echo "installing nearchord[$extras] into $folder (the first time takes a minute or two) ..." >&2
  "$folder/bin/python" -m pip install -qq --disable-pip-version-check --editable ".[$extras]"
  echo "$state" >"$folder/.nearchord-$extras"
}
