#!/bin/sh
# Everything a `beforehand` command needs, then the command: sh generator/run.sh report specs/cold_store/spec.yaml
set -u
. "$(dirname -- "$0")/setup.sh"
exec "$python" -m beforehand "$@"
