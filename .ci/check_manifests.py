"""Checks the folders that c_core/packaging/assemble.sh lays out; asks kconfiglib for the values of a Kconfig file.

    check_manifests.py manifests ROOT FOLDERS INSTALLED   every manifest's keys, versions and lists of files
    check_manifests.py kconfig FILE [SYMBOL=VALUE...]     CMake definitions, as the build systems hand them on

The keys required of a manifest are those of its published documentation, values from memory: Zephyr "Modules",
ESP-IDF "Manifest File Format", Arduino "Library specification", PlatformIO "library.json".
"""

import json
import pathlib
import re
import sys

RELEASE = re.compile(r"(0|[1-9]\d*)\.(0|[1-9]\d*)\.(0|[1-9]\d*)")
ARDUINO_CATEGORIES = ("Display", "Communication", "Signal Input/Output", "Sensors", "Device Control", "Timing",
                      "Data Storage", "Data Processing", "Other", "Uncategorized")


def need(condition, what):
    if not condition:
        sys.exit(f"check_manifests: {what}")


def found(pattern, path):
    match = re.search(pattern, path.read_text(encoding="utf-8"), re.M)
    need(match, f"{path}: nothing matches {pattern}")
    return match[1]


def need_texts(manifest, keys, where):
    for key in keys:
        need(isinstance(manifest.get(key), str) and manifest[key].strip(), f"{where}: {key} is missing or empty")


def need_sources(folder, lister, core):
    """The folder has the core's files, unchanged, and its build file lists each source once."""
    listed = re.findall(r"src/([\w.]+)", (folder / lister).read_text(encoding="utf-8"))
    need(sorted(listed) == sorted(path.name for path in (core / "src").glob("*.c")),
         f"{folder / lister} lists {listed}, not the sources of the core")
    need_copies(folder, core)


def need_copies(folder, core):
    for part in ("include", "src"):
        wanted = {path.name: path.read_bytes() for path in (core / part).iterdir()}
        need({path.name: path.read_bytes() for path in (folder / part).iterdir()} == wanted,
             f"{folder / part} is not the core's {part}")


def zephyr(folder, core):
    import yaml

    manifest = yaml.safe_load((folder / "zephyr/module.yml").read_text(encoding="utf-8"))
    need_texts(manifest, ["name"], "module.yml")
    need(set(manifest) == {"name", "build"} and set(manifest["build"]) == {"cmake", "kconfig"},
         f"module.yml has keys that are not known here: {manifest}")
    need((folder / manifest["build"]["cmake"] / "CMakeLists.txt").is_file(), "module.yml: build.cmake leads nowhere")
    need((folder / manifest["build"]["kconfig"]).is_file(), "module.yml: build.kconfig leads nowhere")
    need_sources(folder, "zephyr/CMakeLists.txt", core)
    return found(r"^# magnav core (\S+)$", folder / "zephyr/CMakeLists.txt")


def esp_idf(folder, core):
    import yaml

    manifest = yaml.safe_load((folder / "idf_component.yml").read_text(encoding="utf-8"))
    need_texts(manifest, ["version", "description", "url", "license"], "idf_component.yml")
    need(re.fullmatch(r"https?://\S+", manifest["url"]), "idf_component.yml: url is not one")
    need(re.fullmatch(r">=\d+\.\d+", manifest["dependencies"]["idf"]), "idf_component.yml: dependencies.idf")
    need_sources(folder, "CMakeLists.txt", core)
    need((folder / "Kconfig").is_file(), "the component has no Kconfig")
    return manifest["version"]


def arduino(folder, core):
    manifest = {}
    for line in (folder / "library.properties").read_text(encoding="utf-8").splitlines():
        key, equals, value = line.partition("=")
        need(equals and key not in manifest, f"library.properties: not a new key=value: {line}")
        manifest[key] = value
    need_texts(manifest, ["name", "version", "author", "maintainer", "sentence", "paragraph", "category", "url",
                          "architectures"], "library.properties")
    need(re.fullmatch(r"[A-Za-z0-9][A-Za-z0-9 _.-]{0,62}", manifest["name"]), "library.properties: name")
    need(manifest["category"] in ARDUINO_CATEGORIES, "library.properties: category is not one of the list")
    need(re.fullmatch(r"https?://\S+", manifest["url"]), "library.properties: url is not one")
    for header in manifest["includes"].split(","):
        need((folder / "src" / header).is_file(), f"library.properties: includes {header}, which is not in src")
    sketches = list((folder / "examples").glob("*/*.ino"))
    need(sketches and all(sketch.parent.name == sketch.stem for sketch in sketches),
         "an example's folder and sketch must have one name")
    need(sorted(path.name for path in (folder / "src").iterdir()) == ["magnav.c", "magnav.h"], "src has other files")
    need(found(r"^#define MAGNAV_CORE_RELEASE \"(.*)\"", folder / "src/magnav.h") == manifest["version"],
         "library.properties and magnav.h differ in the version")
    return manifest["version"]


def platformio(folder, core):
    manifest = json.loads((folder / "library.json").read_text(encoding="utf-8"))
    need_texts(manifest, ["name", "version", "description", "license", "homepage"], "library.json")
    need(re.fullmatch(r"[A-Za-z0-9_-]{1,50}", manifest["name"]), "library.json: name")
    need(all(author.get("name") for author in manifest["authors"]), "library.json: an author without a name")
    build = manifest["build"]
    need((folder / build["srcDir"]).is_dir(), "library.json: build.srcDir leads nowhere")
    for header in manifest["headers"]:
        need((folder / build["includeDir"] / header).is_file(), f"library.json: no header {header}")
    need("-ffp-contract=off" in build["flags"], "library.json: contraction is not forbidden")
    need_copies(folder, core)
    return manifest["version"]


def manifests(root, folders, installed):
    core = root / "c_core"
    release = found(r"^#define MAGNAV_CORE_RELEASE \"(.*)\"$", core / "include/magnav_core.h")
    need(RELEASE.fullmatch(release), f"MAGNAV_CORE_RELEASE is {release}, not of the form 1.2.3")
    config = next(installed.rglob("magnav_core-config-version.cmake"))
    versions = {
        "zephyr": zephyr(folders / "zephyr", core),
        "esp-idf": esp_idf(folders / "esp-idf", core),
        "arduino": arduino(folders / "arduino", core),
        "platformio": platformio(folders / "platformio", core),
        "CMake": found(r"^set\(PACKAGE_VERSION \"(.*)\"\)$", config),
        "pkg-config": found(r"^Version: (.*)$", next(installed.rglob("magnav_core.pc"))),
        "the Python package": found(r"^__version__ = \"(.*)\"$", root / "magnav/__init__.py"),
    }
    for where, version in versions.items():
        need(version == release, f"{where} says {version}, magnav_core.h {release}")
    for path in [path for path in folders.rglob("*") if path.is_file()]:
        left = re.search(rb"@[A-Z]+@", path.read_bytes())
        need(not left, f"{path}: {left and left[0].decode()} was not filled in")
        need((folders / path.relative_to(folders).parts[0] / "LICENSE").is_file(), f"{path}: a folder without LICENSE")
    print(f"release {release} in: {', '.join(versions)}")


def kconfig(file, settings):
    import kconfiglib

    tree = kconfiglib.Kconfig(file, warn_to_stderr=False)
    for setting in settings:
        symbol, _, value = setting.partition("=")
        need(tree.syms[symbol].set_value(value), f"{file}: {symbol} does not take {value}")
        need(tree.syms[symbol].str_value == value, f"{file}: {symbol} became {tree.syms[symbol].str_value}")
    need(not tree.warnings, f"{file}: {tree.warnings}")
    lines = [symbol.config_string.strip() for symbol in tree.unique_defined_syms]
    print(*[f"-D{line}" for line in lines if line.startswith("CONFIG_")])


if sys.argv[1:2] == ["manifests"] and len(sys.argv) == 5:
    manifests(*map(pathlib.Path, sys.argv[2:]))
elif sys.argv[1:2] == ["kconfig"] and len(sys.argv) > 2:
    kconfig(sys.argv[2], sys.argv[3:])
else:
    sys.exit(__doc__)
