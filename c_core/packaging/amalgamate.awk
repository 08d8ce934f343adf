# Joins the headers or the sources of the core into one text. Called by amalgamate.sh, which explains the result.
# POSIX awk. The sources keep the house's form: what is file-level starts in the first column.

function fail(what)
{
    print "amalgamate: " what > "/dev/stderr"
    failed = 1
    exit 1
}

# The lines of a file into text[path, 1..]; once for each file.
function load(path,    line, n, got)
{
    if (path in lines) {
        return
    }
    n = 0
    while ((got = (getline line < path)) > 0) {
        text[path, ++n] = line
    }
    if (got < 0 || n == 0) {
        fail("cannot read " path)
    }
    close(path)
    lines[path] = n
    scan(path)
}

function add_name(path, name)
{
    if (name !~ /^[A-Za-z_][A-Za-z0-9_]*$/) {
        fail("no name found in " path ": " name)
    }
    if (!((path, name) in known)) {
        known[path, name] = 1
        names[path] = names[path] " " name
    }
}

# The last identifier before the first of ( [ = ; in a declaration.
function declared(line)
{
    sub(/([(=;]|\[).*/, "", line)
    sub(/[ \t]+$/, "", line)
    sub(/.*[^A-Za-z0-9_]/, "", line)
    return line
}

# File-level names, macros and includes of a file.
function scan(path,    i, line, depth, allowed, enumerators, parts, count, k)
{
    depth = 0
    enumerators = 0
    allowed = (path ~ /\.h$/) ? 1 : 0
    for (i = 1; i <= lines[path]; i++) {
        line = text[path, i]
        if (line ~ /^#[ \t]*if/) {
            depth++
        } else if (line ~ /^#[ \t]*endif/) {
            depth--
        } else if (line ~ /^#[ \t]*define[ \t]/) {
            sub(/^#[ \t]*define[ \t]+/, "", line)
            sub(/[^A-Za-z0-9_].*/, "", line)
            macros[path] = macros[path] " " line
        } else if (line ~ /^#[ \t]*include/) {
            if (depth > allowed) {
                fail(path ":" i ": an include that depends on a condition cannot be moved")
            }
            if (line ~ /</) {
                sub(/^[^<]*/, "", line)
                sub(/>.*/, ">", line)
                system_includes[path] = system_includes[path] " " line
            } else {
                sub(/^[^"]*"/, "", line)
                sub(/".*/, "", line)
                own_includes[path] = own_includes[path] " " line
            }
        }
        if (path ~ /\/include\//) {
            continue # public names stay as they are
        }
        line = text[path, i]
        gsub(/\/\*[^*]*\*\//, "", line)
        if (line ~ /^static[ \t]+(const[ \t]+)?(struct|union|enum)[ \t]*[A-Za-z0-9_]*[ \t]*[{]/) {
            continue # the object's name follows the closing brace
        }
        if (line ~ /^static[ \t]/) {
            add_name(path, declared(line))
        } else if (line ~ /^}[ \t]*[A-Za-z_]/) {
            sub(/^}[ \t]*/, "", line)
            add_name(path, declared(line))
        } else if (line ~ /^typedef[ \t].*;/) {
            add_name(path, declared(line))
        }
        if (line ~ /^(typedef[ \t]+)?(struct|union|enum)[ \t]+[A-Za-z_][A-Za-z0-9_]*[ \t]*([{]|$)/) {
            sub(/^(typedef[ \t]+)?(struct|union|enum)[ \t]+/, "", line)
            sub(/[^A-Za-z0-9_].*/, "", line)
            add_name(path, line)
            line = text[path, i]
            gsub(/\/\*[^*]*\*\//, "", line)
        }
        if (line ~ /^(typedef[ \t]+)?enum[^;]*[{]/) {
            enumerators = 1
            sub(/^[^{]*[{]/, "", line)
        }
        if (enumerators) {
            if (line ~ /}/) {
                enumerators = 0
                sub(/}.*/, "", line)
            }
            count = split(line, parts, ",")
            for (k = 1; k <= count; k++) {
                sub(/=.*/, "", parts[k])
                gsub(/[ \t]/, "", parts[k])
                if (parts[k] != "") {
                    add_name(path, parts[k])
                }
            }
        }
    }
    if (depth != 0) {
        fail(path ": unbalanced #if")
    }
}

function is_public(name)
{
    return name ~ /^magnav_.*\.h$/
}

# Print a file without its includes of own files, and of system headers where they have been moved; trailing blank
# lines off.
function body(path, keep_system,    i, line, blank)
{
    blank = 0
    for (i = 1; i <= lines[path]; i++) {
        line = text[path, i]
        if (line ~ /^#[ \t]*include[ \t]*"/ || (line ~ /^#[ \t]*include/ && !keep_system)) {
            continue
        }
        if (line ~ /^[ \t]*$/) {
            blank = 1
            continue
        }
        if (blank) {
            print ""
            blank = 0
        }
        print line
    }
}

function title(name)
{
    print ""
    print "/* ======== " name " ======== */"
}

function header(name,    path, parts, count, k)
{
    if (name in emitted) {
        return
    }
    emitted[name] = 1
    path = core "/include/" name
    load(path)
    count = split(own_includes[path], parts, " ")
    for (k = 1; k <= count; k++) {
        header(parts[k])
    }
    title(name)
    body(path, 1)
}

# The private headers that a file includes, the deeper first, into private_of[path].
function collect_private(path, owner,    parts, count, k, inner)
{
    count = split(own_includes[path], parts, " ")
    for (k = 1; k <= count; k++) {
        if (!is_public(parts[k])) {
            inner = core "/src/" parts[k]
            load(inner)
            if (!((owner, inner) in reached)) {
                reached[owner, inner] = 1
                collect_private(inner, owner)
                private_of[owner] = private_of[owner] " " inner
            }
        }
    }
}

function new_name(path, name,    file)
{
    file = path
    sub(/.*\//, "", file)
    gsub(/[^A-Za-z0-9]/, "_", file)
    return "magnav_" file "_" name
}

# #define or #undef for the file-level names of a file.
function rename(path, on,    parts, count, k)
{
    count = split(names[path], parts, " ")
    for (k = 1; k <= count; k++) {
        if (parts[k] !~ /^magnav_/) {
            print (on ? "#define " parts[k] " " new_name(path, parts[k]) : "#undef " parts[k])
        }
    }
}

function undefine_macros(path, guard_too,    parts, count, k)
{
    count = split(macros[path], parts, " ")
    for (k = 1; k <= count; k++) {
        if (!((path, parts[k]) in undefined) && (guard_too || parts[k] !~ /_H$/)) {
            undefined[path, parts[k]] = 1
            print "#undef " parts[k]
        }
    }
}

function source(name,    path, parts, count, k)
{
    path = core "/src/" name
    count = split(private_of[path], parts, " ")
    for (k = 1; k <= count; k++) {
        if (!(parts[k] in emitted)) {
            emitted[parts[k]] = 1
            private_headers[++private_count] = parts[k]
            title("src/" substr(parts[k], length(core "/src/") + 1))
            body(parts[k], 0)
        }
    }
    title("src/" name)
    rename(path, 1)
    print ""
    body(path, 0)
    print ""
    undefine_macros(path, 1)
    rename(path, 0)
}

# System headers come first, before any name is redefined.
function system_header(path,    parts, count, k)
{
    count = split(system_includes[path], parts, " ")
    for (k = 1; k <= count; k++) {
        if (!(parts[k] in emitted)) {
            emitted[parts[k]] = 1
            print "#include " parts[k]
        }
    }
}

BEGIN {
    total = split(files, list, " ")
    if (kind == "header") {
        print "/* magnav core " release ": all public headers in one. SPDX-License-Identifier: MIT */"
        print "#ifndef MAGNAV_H"
        print "#define MAGNAV_H"
        if (single != "") {
            print ""
            print "/* fixed when this file was made: whoever includes it and magnav.c see the same type */"
            print "#ifndef MAGNAV_SINGLE"
            print "#define MAGNAV_SINGLE"
            print "#endif"
        }
        for (f = 1; f <= total; f++) {
            header(list[f])
        }
        print ""
        print "#endif /* MAGNAV_H */"
        exit
    }
    print "/* magnav core " release ": all sources in one. SPDX-License-Identifier: MIT */"
    print "#include \"magnav.h\""
    print ""
    for (f = 1; f <= total; f++) {
        path = core "/src/" list[f]
        load(path)
        collect_private(path, path)
        count = split(private_of[path], parts, " ")
        for (k = 1; k <= count; k++) {
            system_header(parts[k])
        }
        system_header(path)
    }
    print ""
    print "#ifdef __FAST_MATH__"
    print "#error \"magnav: compile without -ffast-math and -Ofast: the results are defined by IEEE 754\""
    print "#endif"
    print "/* No contraction, also where compiler options are not in the user's hand; -ffp-contract=off says the same."
    print "   clang obeys the pragma under its default -ffp-contract=on, not under =fast. */"
    print "#if defined(__clang__)"
    print "#pragma STDC FP_CONTRACT OFF"
    print "#elif defined(__GNUC__)"
    print "#pragma GCC optimize (\"fp-contract=off\")"
    print "#endif"
    for (f = 1; f <= total; f++) {
        source(list[f])
    }
    if (private_count > 0) {
        print ""
        for (k = 1; k <= private_count; k++) {
            undefine_macros(private_headers[k], 0)
        }
    }
}

END {
    if (failed) {
        exit 1
    }
}
