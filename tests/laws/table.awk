# One table from the totals of each law: law against figure, in the fit, left out, as triode; median / 90 % (rows).
# SPDX-License-Identifier: GPL-3.0-or-later
BEGIN {
    FS = "\t"
    sets[1] = "fit"; sets[2] = "left out"; sets[3] = "as triode"
    titles[1] = "in the fit"; titles[2] = "row not in the fit"; titles[3] = "as triode, from pentode rows"
}
$4 == "total" {
    if (!($1 in law_seen)) { law_seen[$1] = 1; law[++laws] = $1 }
    if (!($3 in figure_seen)) { figure_seen[$3] = 1; figure[++figures] = $3 }
    cell[$1, $2, $3] = sprintf("%5.2f /%6.2f (%2d)", $5, $6, $7)
}
END {
    for (s = 1; s <= 3; s++) {
        if (s != 1) printf "\n"
        printf "%-32s", titles[s]
        for (l = 1; l <= laws; l++) printf "  %19s", law[l]
        printf "\n"
        for (f = 1; f <= figures; f++) {
            if (!((law[1], sets[s], figure[f]) in cell)) continue
            printf "%-32s", figure[f]
            for (l = 1; l <= laws; l++) printf "  %19s", cell[law[l], sets[s], figure[f]]
            printf "\n"
        }
    }
}
