#!/bin/sh
# DC solutions per second of the wide-swing cascode, one thread: the program against batched numpy.
# Both must find the same mean output current.
set -eu
cd "$(dirname "$0")/../.."
ours=$(cargo bench --quiet --bench solve -- --rate)
theirs=$(OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1 python3 tests/bench/wide_swing_numpy.py)
printf '%s\n%s\n' "$ours" "$theirs" | awk '
    $1 == "mean_output_current" { mean[++m] = $2 }
    $1 == "solutions_per_second" { rate[++r] = $2 }
    END {
        gap = mean[1] / mean[2] - 1
        if (m != 2 || r != 2 || gap > 1e-9 || gap < -1e-9) {
            print "the two do not solve the same circuit:", mean[1], mean[2]
            exit 1
        }
        printf "biasloom %d solutions per second\nnumpy    %d solutions per second\nratio    %.1f\n", \
            rate[1], rate[2], rate[1] / rate[2]
    }'
