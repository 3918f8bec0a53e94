/* The description of a stage: defaults, load, domain.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/stage.h"

#include <math.h>

#include "platewright/quantity.h"
#include "stage/circuit.h"

#define UNKNOWN ((double)NAN)
#define LEAST_LOAD_OHMS 50.0 /* what is less is a speaker, not its reflection at the plate */

plw_stage plw_stage_ideal(void) {
    return (plw_stage){
        .variant = -1,
        .connection = PLW_CONNECTION_PENTODE,
        .parallel = 1,
        .load_ohms = UNKNOWN,
        .ratio = UNKNOWN,
        .speaker_ohms = UNKNOWN,
        .cathode_resistor_ohms = UNKNOWN,
        .fixed_bias_volts = UNKNOWN,
        .screen_supply_volts = UNKNOWN,
        .drive_peak_volts = UNKNOWN,
    };
}

bool plw_stage_is_triode(const plw_stage *stage) {
    return stage->tube->model.law.kind == PLW_LAW_TRIODE || stage->connection == PLW_CONNECTION_TRIODE;
}

plw_status plw_stage_settle_load(plw_stage *stage, plw_error *error) {
    const double load = stage->load_ohms;
    const double ratio = stage->ratio;
    const double speaker = stage->speaker_ohms;
    const int known = isfinite(load) + isfinite(ratio) + isfinite(speaker);
    if (known == 3 && fabs(ratio * ratio * speaker / load - 1.0) > 0.02) {
        return plw_fail(
            error, PLW_E_USAGE,
            "load: %.4g ohm contradicts a ratio of %.4g with a speaker of %.3g ohm, which reflect %.4g ohm; "
            "leave one of them out",
            load, ratio, speaker, ratio * ratio * speaker);
    }
    if (isfinite(ratio) && isfinite(speaker)) {
        stage->load_ohms = ratio * ratio * speaker;
    } else if (isfinite(load) && isfinite(ratio)) {
        stage->speaker_ohms = load / (ratio * ratio);
    } else if (isfinite(load) && isfinite(speaker)) {
        stage->ratio = sqrt(load / speaker);
    } else if (!isfinite(load)) {
        return plw_fail(
            error, PLW_E_USAGE,
            "load: missing; give the reflected plate load, such as 5k, or the transformer's turns ratio with "
            "the speaker's impedance");
    }
    if (stage->secondary_ohms > 0.0 && !isfinite(stage->ratio)) {
        return plw_fail(error, PLW_E_USAGE,
                        "secondary-ohms: the ratio must be known to reflect them; add the speaker's impedance or the "
                        "turns ratio");
    }
    return PLW_OK;
}

/* One quantity against its domain. */
static plw_status in_range(const char *name, double value, double least, double most, plw_unit unit, plw_error *error) {
    if (value >= least && value <= most) {
        return PLW_OK;
    }
    char got[32];
    char low[32];
    char high[32];
    return plw_fail(
        error, PLW_E_USAGE, "%s: %s lies outside %s to %s", name, plw_quantity_format(value, unit, 3, got, sizeof got),
        plw_quantity_format(least, unit, 3, low, sizeof low), plw_quantity_format(most, unit, 3, high, sizeof high));
}

static plw_status validate_tube(const plw_stage *stage, plw_error *error) {
    const plw_tube *tube = stage->tube;
    if (tube == NULL) {
        return plw_fail(error, PLW_E_USAGE, "tube: missing; give its type, such as EL84");
    }
    if (!tube->has_model) {
        return plw_fail(error, PLW_E_USAGE, "tube: %s has no characteristic law in the catalogue; fit one first",
                        tube->type);
    }
    if (stage->variant >= (int)tube->variants_count) {
        return plw_fail(error, PLW_E_USAGE, "tube: %s has no variant %d", tube->type, stage->variant);
    }
    if (tube->model.law.kind == PLW_LAW_TRIODE &&
        (stage->connection == PLW_CONNECTION_ULTRALINEAR || isfinite(stage->screen_supply_volts) ||
         stage->screen_resistor_ohms > 0.0)) {
        return plw_fail(error, PLW_E_USAGE, "connection: %s is a triode and has no screen; leave screen options out",
                        tube->type);
    }
    if (stage->parallel < 1 || stage->parallel > PLW_PARALLEL_MOST) {
        return plw_fail(error, PLW_E_USAGE, "parallel: %u tubes; 1 to %d are possible", stage->parallel,
                        PLW_PARALLEL_MOST);
    }
    return PLW_OK;
}

static plw_status validate_screen(const plw_stage *stage, plw_error *error) {
    if (stage->connection == PLW_CONNECTION_ULTRALINEAR) {
        if (!(stage->tap > 0.0 && stage->tap < 1.0)) {
            return plw_fail(
                error, PLW_E_USAGE,
                "tap: ultralinear working needs the screen's tap, more than 0 %% and less than 100 %% of the "
                "primary turns, such as 43%%");
        }
    } else if (stage->tap != 0.0) {
        return plw_fail(error, PLW_E_USAGE,
                        "tap: only ultralinear working has a tap; add that connection or leave it out");
    }
    if (isfinite(stage->screen_supply_volts)) {
        if (stage->connection != PLW_CONNECTION_PENTODE) {
            return plw_fail(error, PLW_E_USAGE,
                            "screen-supply: the screen is on the transformer in %s connection; leave it out",
                            plw_connection_name(stage->connection));
        }
        return in_range("screen-supply", stage->screen_supply_volts, 10.0, 5000.0, PLW_UNIT_VOLT, error);
    }
    return PLW_OK;
}

static plw_status validate_bias(const plw_stage *stage, bool bias_wanted, plw_error *error) {
    const bool has_resistor = !isnan(stage->cathode_resistor_ohms);
    const bool has_fixed = !isnan(stage->fixed_bias_volts);
    if (has_resistor && has_fixed) {
        return plw_fail(error, PLW_E_USAGE,
                        "fixed-bias: contradicts cathode-resistor; give the one that the stage is biased with");
    }
    if (has_resistor) {
        return in_range("cathode-resistor", stage->cathode_resistor_ohms, 0.1, 1e6, PLW_UNIT_OHM, error);
    }
    if (has_fixed) {
        if (stage->unbypassed || stage->resistor_each) {
            return plw_fail(error, PLW_E_USAGE,
                            "fixed-bias: there is no cathode resistor to leave unbypassed or to share");
        }
        return in_range("fixed-bias", stage->fixed_bias_volts, -2000.0, 0.0, PLW_UNIT_VOLT, error);
    }
    if (bias_wanted) {
        return plw_fail(error, PLW_E_USAGE, "cathode-resistor: missing; give it, or a fixed bias");
    }
    return PLW_OK;
}

plw_status plw_stage_validate(const plw_stage *stage, bool bias_wanted, plw_error *error) {
    plw_status status = validate_tube(stage, error);
    if (status == PLW_OK) {
        status = validate_screen(stage, error);
    }
    if (status == PLW_OK) {
        status = validate_bias(stage, bias_wanted, error);
    }
    if (status == PLW_OK && stage->load_ohms > 0.0 && stage->load_ohms < LEAST_LOAD_OHMS) {
        return plw_fail(
            error, PLW_E_USAGE,
            "load: %.3g ohm is a speaker's impedance; the plate sees it through the transformer: give the ratio "
            "of turns and the speaker, or the reflected load, such as 5k",
            stage->load_ohms);
    }
    const struct {
        const char *name;
        double value, least, most;
        plw_unit unit;
    } ranges[] = {
        {"load", stage->load_ohms, LEAST_LOAD_OHMS, 1e6, PLW_UNIT_OHM},
        {"primary-ohms", stage->primary_ohms, 0.0, 1e5, PLW_UNIT_OHM},
        {"secondary-ohms", stage->secondary_ohms, 0.0, 1e5, PLW_UNIT_OHM},
        {"screen-resistor", stage->screen_resistor_ohms, 0.0, 1e6, PLW_UNIT_OHM},
        {"driver-ohms", stage->driver_ohms, 0.0, 1e6, PLW_UNIT_OHM},
        {"other-current", stage->other_amps, 0.0, 10.0, PLW_UNIT_AMPERE},
    };
    for (size_t index = 0; status == PLW_OK && index < sizeof ranges / sizeof ranges[0]; index++) {
        status = in_range(ranges[index].name, ranges[index].value, ranges[index].least, ranges[index].most,
                          ranges[index].unit, error);
    }
    if (status == PLW_OK) {
        const double volts = plw_circuit_highest_supply_volts(stage);
        status = in_range("supply", volts, 10.0, 5000.0, PLW_UNIT_VOLT, error);
    }
    return status;
}
