# Reads gcc's call graphs (-fcallgraph-info=su): prints the frame of every function and the deepest stack under each
# function of the interface; fails on recursion and on a frame whose size is not fixed.
function name_of(title) { sub(/.*:/, "", title); return title }

function deepest(f, path,    i, n, called, most, depth) {
    if (index(path, " " f " ")) {
        print "recursion:" path f
        failed = 1
        return 0
    }
    most = 0
    n = split(calls[f], called, " ")
    for (i = 1; i <= n; i++) {
        depth = deepest(called[i], path f " ")
        if (depth > most) most = depth
    }
    return frame[f] + most
}

/^node:/ && /bytes \(/ {
    split($0, quoted, "\"")
    f = name_of(quoted[2])
    match($0, /[0-9]+ bytes \([a-z,]+\)/)
    words = substr($0, RSTART, RLENGTH)
    frame[f] = words + 0
    if (words !~ /\(static\)/) {
        print "not a fixed frame: " f
        failed = 1
    }
}
/^edge:/ {
    split($0, quoted, "\"")
    calls[name_of(quoted[2])] = calls[name_of(quoted[2])] " " name_of(quoted[4])
}
END {
    # x86-64 pushes 8 bytes of return address per call; they are in gcc's frame figures
    print "stack: own frame, deepest chain, function"
    for (f in frame) printf "%8d %8d  %s\n", frame[f], deepest(f, " "), f | "sort -k2 -n -r"
    close("sort -k2 -n -r")
    exit failed
}
