# Row by row: in how many left-out and triode-connected figures the first law is nearer to print than each other law,
# and in how many farther.
# SPDX-License-Identifier: GPL-3.0-or-later
BEGIN { FS = "\t" }
$4 == "row" && $2 != "fit" {
    error = $7 < 0 ? -$7 : $7
    key = $2 SUBSEP $3 SUBSEP $5 SUBSEP $6
    if (reference == "") reference = $1
    if ($1 == reference) { of_reference[key] = error; next }
    if (!($1 in law_seen)) { law_seen[$1] = 1; law[++laws] = $1 }
    if (!(($2, $3) in seen)) { seen[$2, $3] = 1; set[++lines] = $2; figure[lines] = $3 }
    if (!(key in of_reference)) next
    if (of_reference[key] < error) nearer[$1, $2, $3]++
    if (of_reference[key] > error) farther[$1, $2, $3]++
}
END {
    printf "\n%-43s", reference " nearer : farther than"
    for (l = 1; l <= laws; l++) printf "  %10s", law[l]
    printf "\n"
    for (i = 1; i <= lines; i++) {
        printf "%-9s  %-32s", set[i], figure[i]
        for (l = 1; l <= laws; l++)
            printf "     %2d : %2d", nearer[law[l], set[i], figure[i]], farther[law[l], set[i], figure[i]]
        printf "\n"
    }
}
