#!/bin/sh
# Lays out a folder that a package system of embedded projects takes as it is: assemble.sh KIND OUTDIR [single]
#
#   zephyr      a Zephyr module            include/ src/ zephyr/
#   esp-idf     an ESP-IDF component       include/ src/ CMakeLists.txt Kconfig idf_component.yml
#   platformio  a PlatformIO library       include/ src/ library.json
#   arduino     an Arduino library         src/magnav.h src/magnav.c library.properties examples/
#
# OUTDIR must be empty or not exist. `single` (arduino only, whose builds take no defines): the library in float.
# The manifests are the templates beside this script, with @NAMES@ filled in from facts.sh and the header's release.
set -eu
LC_ALL=C
export LC_ALL
usage()
{
    echo "usage: assemble.sh zephyr|esp-idf|platformio|arduino OUTDIR [single]" >&2
    exit 2
}
[ $# -eq 2 ] || [ $# -eq 3 ] || usage
kind=$1
out=$2
single=${3:-}
case $kind in zephyr | esp-idf | platformio | arduino) ;; *) usage ;; esac
case $kind:$single in *: | arduino:single) ;; *) usage ;; esac
here=$(cd "$(dirname "$0")" && pwd)
core=$here/..
if [ -n "$(ls -A "$out" 2>/dev/null)" ]; then
    echo "assemble.sh: $out is not empty" >&2
    exit 1
fi
. "$here/facts.sh"
release=$(sed -n 's/^#define MAGNAV_CORE_RELEASE "\(.*\)"$/\1/p' "$core/include/magnav_core.h")
[ -n "$release" ] || { echo "assemble.sh: no MAGNAV_CORE_RELEASE in magnav_core.h" >&2; exit 1; }
sources=
for path in "$core"/src/*.c; do
    sources="$sources ${path##*/}"
done
mkdir -p "$out"

# $1: template; $2: target. A line with @SOURCE@ is repeated for each source. @SETTINGS@ is the common Kconfig text.
fill()
{
    mkdir -p "$(dirname "$2")"
    NAME=$name RELEASE=$release SENTENCE=$sentence PARAGRAPH=$paragraph MAINTAINER=$maintainer MAIL=$mail URL=$url \
        LICENCE=$licence SOURCES=$sources awk -v settings="$here/settings.kconfig" '
        function fill_in(line, key,    at, value) {
            value = ENVIRON[key]
            key = "@" key "@"
            while ((at = index(line, key)) > 0) {
                line = substr(line, 1, at - 1) value substr(line, at + length(key))
            }
            return line
        }
        BEGIN { count = split("NAME RELEASE SENTENCE PARAGRAPH MAINTAINER MAIL URL LICENCE", keys, " ") }
        $0 == "@SETTINGS@" { while ((getline line < settings) > 0) print line; next }
        /@SOURCE@/ {
            total = split(ENVIRON["SOURCES"], list, " ")
            for (k = 1; k <= total; k++) {
                at = index($0, "@SOURCE@")
                print substr($0, 1, at - 1) list[k] substr($0, at + 8)
            }
            next
        }
        { for (k = 1; k <= count; k++) $0 = fill_in($0, keys[k]); print }' "$1" >"$2"
}

case $kind in
arduino)
    sh "$here/amalgamate.sh" "$out/src" $single
    mv "$out/src/LICENSE" "$out/LICENSE"
    ;;
*)
    mkdir -p "$out/include" "$out/src"
    cp "$core"/include/magnav_*.h "$out/include/"
    cp "$core"/src/*.c "$core"/src/*.h "$out/src/"
    cp "$core/../LICENSE" "$out/LICENSE"
    ;;
esac
(cd "$here/$kind" && find . -type f) | sort | while read -r file; do
    fill "$here/$kind/$file" "$out/${file#./}"
done
