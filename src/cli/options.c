/* The one table of options: parser, help, manual page and completion are all made from it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/options.h"

#include <string.h>

#include "platewright/quantity.h"

static const char *const connections[] = {"pentode", "triode", "ultralinear", NULL};
static const char *const series[] = {"E6", "E12", "E24", "E48", "E96", "E192", NULL};
static const char *const formats[] = {"text", "json", "csv", NULL};
static const char *const kinds[] = {"load-line", "transfer", "supply", "family", NULL};
static const char *const tube_kinds[] = {"triode", "pentode", "beam", NULL};
static const char *const rating_systems[] = {"design-center", "design-maximum", "absolute", "stated", NULL};
static const char *const all_tube_kinds[] = {"triode", "pentode", "beam", "rectifier", NULL};
static const char *const tube_formats[] = {"text", "json", "names", NULL};
static const char *const rectifiers[] = {"full-wave", "bridge", "half-wave", NULL};

#define WHY_NOT_IN_DESIGN "design chooses the resistor itself; platewright check solves a stage whose bias is given"

#define STAGE_OPTION(option_name, option_group, option_commands, option_placeholder, option_help)                      \
    .name = (option_name), .value = CLI_VALUE_TEXT, .placeholder = (option_placeholder), .group = (option_group),      \
    .commands = (option_commands), .stage = true, .help = (option_help)

#define STAGE_SWITCH(option_name, option_group, option_help)                                                           \
    .name = (option_name), .value = CLI_VALUE_SWITCH, .group = (option_group), .commands = CLI_STAGE, .stage = true,   \
    .help = (option_help)

/* Only what works stands here. */
static const cli_option options[] = {
    {STAGE_OPTION("tube", CLI_GROUP_TUBE, CLI_STAGE, "TYPE",
                  "output tube, e.g. 6V6GT; any spelling, and equivalents (6BQ5 is EL84)")},
    {STAGE_OPTION("parallel", CLI_GROUP_TUBE, CLI_STAGE, "N", "equal tubes side by side, e.g. 2")},
    {STAGE_OPTION("connection", CLI_GROUP_TUBE, CLI_STAGE, "HOW",
                  "how the screen is wired: pentode (default), triode or ultralinear"),
     .choices = connections},
    {STAGE_OPTION("tap", CLI_GROUP_TUBE, CLI_STAGE, "PERCENT",
                  "ultralinear: where the tap sits on the primary, e.g. "
                  "43%")},

    {STAGE_OPTION("supply", CLI_GROUP_SUPPLY, CLI_STAGE, "VOLTS",
                  "supply voltage with the stage drawing its current, e.g. 285V; with --source-ohms the voltage off "
                  "load")},
    {STAGE_OPTION("source-ohms", CLI_GROUP_SUPPLY, CLI_STAGE, "OHMS", "resistance of the supply, e.g. 1.8k")},
    {STAGE_OPTION("reading", CLI_GROUP_SUPPLY, CLI_STAGE, "READING",
                  "what the supply read on the bench, once for each reading: 305V off load, 258V@10k into a resistor, "
                  "271V@18mA at a current"),
     .repeatable = true},
    {STAGE_OPTION("winding", CLI_GROUP_SUPPLY, CLI_STAGE, "VOLTS",
                  "RMS volts of the high-voltage winding off load, of each half when centre-tapped, e.g. 230V; with "
                  "--reading the source resistance is found through the rectifier")},
    {STAGE_OPTION("rectifier", CLI_GROUP_SUPPLY, CLI_STAGE, "HOW",
                  "how it is rectified: full-wave (two diodes, centre-tapped winding), bridge or half-wave"),
     .choices = rectifiers},
    {STAGE_OPTION("diode", CLI_GROUP_SUPPLY, CLI_STAGE, "TYPE", "silicon (default) or a rectifier tube, e.g. GZ34")},
    {STAGE_OPTION("reservoir", CLI_GROUP_SUPPLY, CLI_STAGE, "FARADS",
                  "first capacitor behind the rectifier, e.g. 47uF; else so large that no ripple is left")},
    {STAGE_SWITCH("transformerless", CLI_GROUP_SUPPLY,
                  "the rectifier hangs straight on the mains and the heaters stand in a string; --winding is then the "
                  "mains voltage: the chassis may be live")},
    {STAGE_OPTION("winding-ohms", CLI_GROUP_SUPPLY, CLI_STAGE, "OHMS",
                  "copper of a conducting path: half or whole secondary with the primary reflected, e.g. 95")},
    {STAGE_OPTION("mains", CLI_GROUP_SUPPLY, CLI_STAGE, "HERTZ", "mains frequency, 50Hz (default) or 60Hz")},
    {STAGE_OPTION("dropper", CLI_GROUP_SUPPLY, CLI_STAGE, "OHMS",
                  "resistor in the filter, e.g. 470, with --smoothing behind it; parts in the order they are wired"),
     .repeatable = true},
    {STAGE_OPTION("choke", CLI_GROUP_SUPPLY, CLI_STAGE, "HENRIES",
                  "choke in the filter, e.g. 8H, with --smoothing behind it; first and without --reservoir: choke "
                  "input"),
     .repeatable = true},
    {STAGE_OPTION("choke-ohms", CLI_GROUP_SUPPLY, CLI_STAGE, "OHMS", "copper of the choke before it, e.g. 180"),
     .repeatable = true},
    {STAGE_OPTION("smoothing", CLI_GROUP_SUPPLY, CLI_STAGE, "FARADS",
                  "capacitor behind the dropper or choke before it, e.g. 47uF"),
     .repeatable = true},
    {STAGE_OPTION("bleeder", CLI_GROUP_SUPPLY, CLI_STAGE, "OHMS", "resistor across the output, e.g. 220k")},
    {STAGE_OPTION("other-current", CLI_GROUP_SUPPLY, CLI_STAGE, "AMPS",
                  "what the rest of the set draws from this supply, e.g. 3mA")},

    {STAGE_OPTION("load", CLI_GROUP_TRANSFORMER, CLI_STAGE, "OHMS",
                  "load that the plate sees through the transformer, e.g. 5k; or give --ratio and --speaker")},
    {STAGE_OPTION("ratio", CLI_GROUP_TRANSFORMER, CLI_STAGE, "RATIO", "turns, primary to secondary, e.g. 25")},
    {STAGE_OPTION("speaker", CLI_GROUP_TRANSFORMER, CLI_STAGE, "OHMS", "impedance of the speaker, e.g. 8")},
    {STAGE_OPTION("primary-ohms", CLI_GROUP_TRANSFORMER, CLI_STAGE, "OHMS", "copper of the primary, e.g. 280")},
    {STAGE_OPTION("secondary-ohms", CLI_GROUP_TRANSFORMER, CLI_STAGE, "OHMS", "copper of the secondary, e.g. 0.5")},

    {STAGE_OPTION("cathode-resistor", CLI_GROUP_BIAS, CLI_CHECK | CLI_PLOT | CLI_SUPPLY, "OHMS",
                  "cathode resistor as fitted, e.g. 270"),
     .elsewhere = WHY_NOT_IN_DESIGN},
    {STAGE_OPTION(
         "fixed-bias", CLI_GROUP_BIAS, CLI_CHECK | CLI_PLOT | CLI_SUPPLY, "VOLTS",
         "grid bias from a supply of its own, e.g. -12.5V; with the mains low and high it is taken to follow them"),
     .elsewhere = WHY_NOT_IN_DESIGN},
    {STAGE_SWITCH("resistor-each", CLI_GROUP_BIAS, "with --parallel: one cathode resistor a tube, not one for all")},
    {STAGE_SWITCH("unbypassed", CLI_GROUP_BIAS, "no capacitor across the cathode resistor")},

    {STAGE_OPTION(
        "screen-supply", CLI_GROUP_SCREEN, CLI_STAGE, "VOLTS",
        "screen fed from a supply of its own, e.g. 250V, taken to follow the mains; else from the plate supply")},
    {STAGE_OPTION("screen-resistor", CLI_GROUP_SCREEN, CLI_STAGE, "OHMS",
                  "resistor in the screen lead, one a tube, e.g. 1k")},
    {STAGE_SWITCH("screen-bypassed", CLI_GROUP_SCREEN, "a capacitor holds the screen side of that resistor")},

    {STAGE_OPTION("drive", CLI_GROUP_SIGNAL, CLI_STAGE, "VOLTS",
                  "peak signal at the grid, e.g. 12.5V; else up to grid current or cut-off, whichever comes first")},
    {STAGE_OPTION("driver-ohms", CLI_GROUP_SIGNAL, CLI_STAGE, "OHMS",
                  "resistance of what drives the grid, e.g. 47k: grid current then clips the crest softly")},

    {.name = "current",
     .value = CLI_VALUE_TEXT,
     .placeholder = "AMPS",
     .group = CLI_GROUP_QUESTION,
     .commands = CLI_SUPPLY,
     .help = "what is drawn where no stage is described, e.g. 45mA"},
    {.name = "regulation",
     .value = CLI_VALUE_TEXT,
     .placeholder = "PERCENT",
     .group = CLI_GROUP_QUESTION,
     .commands = CLI_SUPPLY,
     .help = "work out the transformer wanted, of this regulation, e.g. 15%; with --supply it is always done"},
    {.name = "capacitor-volts",
     .value = CLI_VALUE_TEXT,
     .placeholder = "VOLTS",
     .group = CLI_GROUP_QUESTION,
     .commands = CLI_SUPPLY,
     .help = "what the capacitors are rated for, e.g. 350V"},
    {.name = "capacitor-amps",
     .value = CLI_VALUE_TEXT,
     .placeholder = "AMPS",
     .group = CLI_GROUP_QUESTION,
     .commands = CLI_SUPPLY,
     .help = "ripple current that the capacitors are rated for, RMS, e.g. 200mA"},
    {.name = "winding-amps",
     .value = CLI_VALUE_TEXT,
     .placeholder = "AMPS",
     .group = CLI_GROUP_QUESTION,
     .commands = CLI_SUPPLY,
     .help = "RMS current that the high-voltage winding is rated for, e.g. 80mA"},
    {.name = "heater-winding",
     .value = CLI_VALUE_TEXT,
     .placeholder = "AMPS",
     .group = CLI_GROUP_QUESTION,
     .commands = CLI_SUPPLY,
     .help = "current that the heater winding of the output tube is rated for, e.g. 2A"},

    {.name = "aim",
     .value = CLI_VALUE_TEXT,
     .placeholder = "AIM",
     .group = CLI_GROUP_AIM,
     .commands = CLI_STAGE,
     .help = "dissipation=90% of the rated plate dissipation (default), current=40mA of plate current, or power for "
             "the most power"},
    {.name = "series",
     .value = CLI_VALUE_CHOICE,
     .placeholder = "SERIES",
     .group = CLI_GROUP_AIM,
     .commands = CLI_STAGE,
     .choices = series,
     .help = "preferred values to choose from: E6, E12, E24 (default), E48, E96 or E192"},

    {.name = "measured",
     .value = CLI_VALUE_TEXT,
     .placeholder = "READINGS",
     .group = CLI_GROUP_METER,
     .commands = CLI_CHECK,
     .repeatable = true,
     .help = "meter readings with the black lead on the chassis: cathode=12.9V, and what else is known of supply=, "
             "plate= and screen=, with commas between or one at a time"},

    {.name = "type",
     .value = CLI_VALUE_TEXT,
     .placeholder = "TYPE",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "type designation of the tube that a table is of, e.g. 6X99"},
    {.name = "kind",
     .value = CLI_VALUE_CHOICE,
     .placeholder = "KIND",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .choices = tube_kinds,
     .help = "what it is: triode, pentode or beam"},
    {.name = "base",
     .value = CLI_VALUE_TEXT,
     .placeholder = "BASE",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "its base, e.g. octal"},
    {.name = "heater-volts",
     .value = CLI_VALUE_TEXT,
     .placeholder = "VOLTS",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "heater voltage, e.g. 6.3V; needed for --output, as are the five below"},
    {.name = "heater-amps",
     .value = CLI_VALUE_TEXT,
     .placeholder = "AMPS",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "heater current, e.g. 450mA"},
    {.name = "directly-heated",
     .value = CLI_VALUE_SWITCH,
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "the filament is the cathode"},
    {.name = "plate-volts",
     .value = CLI_VALUE_TEXT,
     .placeholder = "VOLTS",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "plate voltage limit, e.g. 315V"},
    {.name = "screen-volts",
     .value = CLI_VALUE_TEXT,
     .placeholder = "VOLTS",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "screen voltage limit, e.g. 285V; none for a triode"},
    {.name = "plate-watts",
     .value = CLI_VALUE_TEXT,
     .placeholder = "WATTS",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "plate dissipation limit, e.g. 12W"},
    {.name = "screen-watts",
     .value = CLI_VALUE_TEXT,
     .placeholder = "WATTS",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "screen dissipation limit, e.g. 2W; none for a triode"},
    {.name = "pins",
     .value = CLI_VALUE_TEXT,
     .placeholder = "LIST",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "its pins, e.g. \"2=heater, 3=plate, 4=screen, 5=grid 1, 7=heater, 8=cathode\": reports name the pin then "
             "that the meter goes to"},
    {.name = "rating-system",
     .value = CLI_VALUE_CHOICE,
     .placeholder = "SYSTEM",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .choices = rating_systems,
     .help = "what the limits are: design-center, design-maximum, absolute or stated (default: the sheet does not "
             "say); design-maximum and absolute ones must hold with high mains too"},
    {.name = "source",
     .value = CLI_VALUE_TEXT,
     .placeholder = "TITLE",
     .group = CLI_GROUP_TABLE,
     .commands = CLI_FIT,
     .help = "the sheet that pins, heater and limits were read from: title, publisher, year; without it they count as "
             "told"},

    {.name = "like",
     .value = CLI_VALUE_TEXT,
     .placeholder = "TYPE",
     .group = CLI_GROUP_WHICH,
     .commands = CLI_TUBES,
     .help = "the types electrically nearest to this one, e.g. EL84, and what would change with each"},
    {.name = "kind",
     .value = CLI_VALUE_CHOICE,
     .placeholder = "KIND",
     .group = CLI_GROUP_WHICH,
     .commands = CLI_TUBES,
     .choices = all_tube_kinds,
     .help = "only these: triode, pentode, beam or rectifier"},
    {.name = "base",
     .value = CLI_VALUE_TEXT,
     .placeholder = "BASE",
     .group = CLI_GROUP_WHICH,
     .commands = CLI_TUBES,
     .help = "only those with this base, e.g. octal or noval"},
    {.name = "least-watts",
     .value = CLI_VALUE_TEXT,
     .placeholder = "WATTS",
     .group = CLI_GROUP_WHICH,
     .commands = CLI_TUBES,
     .help = "only those rated for this plate dissipation or more, e.g. 10W"},
    {.name = "most-watts",
     .value = CLI_VALUE_TEXT,
     .placeholder = "WATTS",
     .group = CLI_GROUP_WHICH,
     .commands = CLI_TUBES,
     .help = "only those rated for this plate dissipation or less, e.g. 15W"},
    {.name = "heater",
     .value = CLI_VALUE_TEXT,
     .placeholder = "VOLTS",
     .group = CLI_GROUP_WHICH,
     .commands = CLI_TUBES,
     .help = "only those for this heater or filament voltage, within 5 %, e.g. 6.3V"},

    {.name = "kind",
     .value = CLI_VALUE_CHOICE,
     .placeholder = "KIND",
     .group = CLI_GROUP_RESULT,
     .commands = CLI_PLOT,
     .choices = kinds,
     .help = "what to draw: load-line (default), transfer, supply, or family: the tube's plate curves with what is "
             "printed of it, for which --tube is enough"},
    {.name = "format",
     .value = CLI_VALUE_CHOICE,
     .placeholder = "FORMAT",
     .group = CLI_GROUP_RESULT,
     .commands = CLI_TUBES,
     .choices = tube_formats,
     .help = "text (default), json, or names: the designations alone, one a line"},
    {.name = "format",
     .value = CLI_VALUE_CHOICE,
     .placeholder = "FORMAT",
     .group = CLI_GROUP_RESULT,
     .commands = CLI_DESIGN | CLI_CHECK | CLI_SUPPLY,
     .choices = formats,
     .help = "text (default), json or csv"},
    {.name = "output",
     .letter = 'o',
     .value = CLI_VALUE_FILE,
     .placeholder = "FILE",
     .group = CLI_GROUP_RESULT,
     .commands = CLI_DESIGN | CLI_CHECK | CLI_SUPPLY | CLI_TUBES,
     .help = "write the result to a file instead of the screen"},
    {.name = "output",
     .letter = 'o',
     .value = CLI_VALUE_FILE,
     .placeholder = "FILE",
     .group = CLI_GROUP_RESULT,
     .commands = CLI_PLOT,
     .help = "drawing to make: NAME.svg, NAME.png or NAME.pdf, with its gnuplot script NAME.gp beside it; NAME.gp for "
             "the script alone; else the script goes to the screen"},
    {.name = "output",
     .letter = 'o',
     .value = CLI_VALUE_FILE,
     .placeholder = "FILE",
     .group = CLI_GROUP_RESULT,
     .commands = CLI_FIT,
     .help = "write the tube file with the new coefficients; it may be the file that was read"},
    {.name = "plot",
     .value = CLI_VALUE_FILE,
     .placeholder = "FILE",
     .group = CLI_GROUP_RESULT,
     .commands = CLI_FIT,
     .help = "draw the plate family with what was given and by how much the law misses it: NAME.svg, NAME.png or "
             "NAME.pdf, with its gnuplot script beside it; NAME.gp for the script alone"},
    {.name = "save",
     .value = CLI_VALUE_FILE,
     .placeholder = "FILE",
     .group = CLI_GROUP_RESULT,
     .commands = CLI_STAGE,
     .help = "write the stage, with the resistor chosen, to a stage file"},

    {.name = "tubes",
     .value = CLI_VALUE_FOLDER,
     .placeholder = "FOLDER",
     .group = CLI_GROUP_GENERAL,
     .commands = CLI_STAGE | CLI_TUBES,
     .help = "look for tube files here first"},
    {.name = "help",
     .letter = 'h',
     .value = CLI_VALUE_NONE,
     .group = CLI_GROUP_GENERAL,
     .commands = CLI_EVERY | CLI_OVERALL,
     .help = "show this help"},
    {.name = "version",
     .value = CLI_VALUE_NONE,
     .group = CLI_GROUP_GENERAL,
     .commands = CLI_OVERALL,
     .help = "show the version"},
    {.name = "man",
     .value = CLI_VALUE_NONE,
     .group = CLI_GROUP_GENERAL,
     .commands = CLI_OVERALL,
     .help = "write the manual page, for man(1)"},
    {.name = "completion",
     .value = CLI_VALUE_NONE,
     .group = CLI_GROUP_GENERAL,
     .commands = CLI_OVERALL,
     .help = "write the completion script, for bash"},
};

enum { OPTIONS = sizeof options / sizeof options[0] };

const cli_option *cli_option_at(size_t index) {
    return index < OPTIONS ? &options[index] : NULL;
}

const cli_option *cli_option_find(const char *name, unsigned commands) {
    const cli_option *elsewhere = NULL;
    for (size_t i = 0; i < OPTIONS; i++) {
        const bool same =
            name[0] != '\0' && name[1] == '\0' ? options[i].letter == name[0] : strcmp(options[i].name, name) == 0;
        if (same && (options[i].commands & commands) != 0) {
            return &options[i];
        }
        if (same) {
            elsewhere = &options[i];
        }
    }
    return elsewhere;
}

const char *cli_group_title(cli_group group) {
    static const char *const titles[CLI_GROUP_COUNT] = {
        [CLI_GROUP_TUBE] = "The tube",
        [CLI_GROUP_SUPPLY] = "The plate supply",
        [CLI_GROUP_TRANSFORMER] = "The output transformer and the speaker",
        [CLI_GROUP_BIAS] = "The bias",
        [CLI_GROUP_SCREEN] = "The screen",
        [CLI_GROUP_SIGNAL] = "The signal",
        [CLI_GROUP_QUESTION] = "What is asked of the supply",
        [CLI_GROUP_AIM] = "The choice of the cathode resistor",
        [CLI_GROUP_METER] = "On the bench",
        [CLI_GROUP_TABLE] = "The tube of a table",
        [CLI_GROUP_WHICH] = "Which tubes",
        [CLI_GROUP_RESULT] = "The result",
        [CLI_GROUP_GENERAL] = "In general",
    };
    return titles[group];
}

const char *cli_option_nearest(const char *name, unsigned commands) {
    const char *names[OPTIONS];
    size_t count = 0;
    for (size_t i = 0; i < OPTIONS; i++) {
        if ((options[i].commands & commands) != 0) {
            names[count++] = options[i].name;
        }
    }
    size_t found = 0;
    return plw_nearest_names(name, names, count, &found, 1) == 1 ? names[found] : NULL;
}
