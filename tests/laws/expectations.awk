# Expectations of a law's coefficients for each type, from fits with wide ones to the other tubes of its kind: neither
# the type itself nor another of its family has a part in them.  Lines of type, coefficient's place, value, deviation;
# the line of type '*' is over all tubes of the kind, for the reader.
#
# Value: the median.  Deviation: half of what lies between 16 and 84 %, within limits that are the same for every law.
# Of the logarithm; of kp: of kp/mu; of contact-volts: of the value itself.  mu and kg1 are left open, foot-growth is
# what the candidate has it to be.
# SPDX-License-Identifier: GPL-3.0-or-later
BEGIN { FS = "\t" }

function limited(value, least, most) { return value < least ? least : value > most ? most : value }

function quantile(part,    at, below) {
    at = part * (n - 1)
    below = int(at)
    return sorted[below + 1] + (at - below) * (sorted[below + 2 <= n ? below + 2 : n] - sorted[below + 1])
}

# Values of a coefficient over the tubes of a kind, but of one family, in order.
function collect(kind, place, but_family,    t, i) {
    n = 0
    for (t = 1; t <= tubes; t++) {
        if (kind_of[t] != kind || family_of[t] == but_family) continue
        sorted[++n] = value[t, place]
        for (i = n; i > 1 && sorted[i] < sorted[i - 1]; i--) { swap = sorted[i]; sorted[i] = sorted[i - 1]; sorted[i - 1] = swap }
    }
}

function expect(type, kind, but_family,    place, middle, spread, name) {
    for (place = 0; place < places; place++) {
        name = name_of[place]
        collect(kind, place, but_family)
        if (n == 0) continue
        middle = quantile(0.5)
        spread = (quantile(0.84) - quantile(0.16)) / 2
        if (name == "contact-volts") spread = limited(spread, 0.2, 0.5)
        else {
            middle = exp(middle)
            spread = name == "exponent" ? limited(spread, 0.02, 0.08) : limited(spread, 0.3, 1.0)
        }
        if (name == "foot-growth") spread = 0.02
        if (name == "mu") { middle = 10; spread = 1 }
        if (name == "kg1") { middle = 1000; spread = 3 }
        if (type == "*") printf "%-12s %-8s %-14s %10.3g  +/- %.2g (%d tubes)\n", law, kind, name, middle, spread, n
        else printf "%s %d %.4g %.3g\n", type, place, middle, spread
    }
}

{
    law = $1
    if (!($3 in place_of_type)) {
        place_of_type[$3] = ++tubes
        type_of[tubes] = $3; kind_of[tubes] = $2; family_of[tubes] = $4
    }
    name_of[$6] = $5
    if ($6 >= places) places = $6 + 1
    t = place_of_type[$3]
    if ($5 == "mu") mu = $7
    value[t, $6] = $5 == "contact-volts" ? $7 : log($5 == "kp" ? $7 / mu : $7)
}

END {
    if (summary) {
        expect("*", "pentode", "")
        expect("*", "beam", "")
        expect("*", "triode", "")
        expect("*", "filament triode", "")
    } else {
        for (tube = 1; tube <= tubes; tube++) expect(type_of[tube], kind_of[tube], family_of[tube])
    }
}
