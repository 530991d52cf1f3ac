#!/bin/sh
# DC solutions per second of the wide-swing cascode, one thread: the program against batched numpy.
# Both must find the same mean output current.
set -eu
cd "$(dirname "$0")/../.."
ours=$(cargo bench --quiet --bench solve -- --rate)
theirs=$(OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1 MKL_NUM_THREADS=1 python3 tests/bench/wide_swing_numpy.py)
printf '%s\n%s\n' "$ours" "$theirs" | awk '
    $1 == "mean_output_current" { mean[++m] = $2 }
    $1 == "solutions_per_second" && NF == 2 { ours = $2 }
    # The first batch is the corners of one circuit; of the larger ones the best counts.
    $1 == "solutions_per_second" && NF == 3 && ++r == 1 { corners = $2; few = $3 }
    $1 == "solutions_per_second" && NF == 3 && r > 1 && $2 > best { best = $2; many = $3 }
    END {
        gap = mean[1] / mean[2] - 1
        if (m != 2 || !ours || !best || gap > 1e-9 || gap < -1e-9) {
            print "the two do not solve the same circuit:", mean[1], mean[2]
            exit 1
        }
        printf "biasloom                             %8d solutions per second\n", ours
        printf "numpy, %4d corners of one circuit   %8d solutions per second, ratio %.1f\n", \
            few, corners, ours / corners
        printf "numpy, %4d at once, its best        %8d solutions per second, ratio %.1f\n", \
            many, best, ours / best
    }'
