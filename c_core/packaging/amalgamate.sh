#!/bin/sh
# Writes the core as one header and one source: amalgamate.sh OUTDIR [single]
#
# OUTDIR/magnav.h  the public headers: magnav_config.h, magnav_core.h, the others sorted; what one includes comes before
# OUTDIR/magnav.c  the sources, sorted; a private header before the first that includes it
# With `single` the header defines MAGNAV_SINGLE itself, for builds that cannot be given a define.
#
# File-level names of a source are private to it. Around each source they are defined as magnav_<file>_c_<name> and
# undefined after, together with the source's own macros, so equal names in two sources do not meet.
set -eu
LC_ALL=C
export LC_ALL
if [ $# -lt 1 ] || [ $# -gt 2 ] || [ "${2:-single}" != single ]; then
    echo "usage: amalgamate.sh OUTDIR [single]" >&2
    exit 2
fi
out=$1
single=${2:-}
core=$(dirname "$0")/..
headers="magnav_config.h magnav_core.h"
for path in "$core"/include/magnav_*.h; do
    case ${path##*/} in magnav_config.h | magnav_core.h) ;; *) headers="$headers ${path##*/}" ;; esac
done
sources=
for path in "$core"/src/*.c; do
    sources="$sources ${path##*/}"
done
release=$(sed -n 's/^#define MAGNAV_CORE_RELEASE "\(.*\)"$/\1/p' "$core/include/magnav_core.h")
[ -n "$release" ] || { echo "amalgamate.sh: no MAGNAV_CORE_RELEASE in magnav_core.h" >&2; exit 1; }
mkdir -p "$out"

# $1: header or source; $2: files in order
generate() {
    awk -v kind="$1" -v files="$2" -v core="$core" -v release="$release" -v single="$single" \
        -f "$core/packaging/amalgamate.awk" /dev/null
}
# written whole or not at all
generate header "$headers" >"$out/magnav.h.part"
generate source "$sources" >"$out/magnav.c.part"
mv "$out/magnav.h.part" "$out/magnav.h"
mv "$out/magnav.c.part" "$out/magnav.c"
cp "$core/../LICENSE" "$out/LICENSE"
