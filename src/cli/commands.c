/* The table of commands.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/commands.h"

#include <string.h>

#include "cli/options.h"
#include "platewright/quantity.h"

static const cli_command commands[] = {
    {.name = "design",
     .bit = CLI_DESIGN,
     .positional = "[STAGE.xml]",
     .summary = "choose the cathode resistor for a tube, a supply and a load",
     .description = "Works out which cathode resistor brings the tube to its aim on the supply that is really there, "
                    "and says what it costs: its watts, the voltages a meter will read at each pin, the margins to "
                    "the ratings, power and distortion, and the same for the next values above and below.",
     .examples = {{"A table radio in for repair at Morrow Quay: 285 V, transformer of 5k",
                   "platewright design --tube 6V6GT --supply 285V --load 5k"},
                  {"The supply by two readings, the load by ratio and speaker, E12 resistors",
                   "platewright design --tube EL84 --reading 290V --reading 255V@5k --ratio 25 --speaker 8 --series "
                   "E12"},
                  {"From a stage file, aiming at 40 mA, the result kept for the bench",
                   "platewright design quay-radio.xml --aim current=40mA --save as-built.xml"}},
     .run = cli_run_design},
    {.name = "check",
     .bit = CLI_CHECK,
     .positional = "[STAGE.xml]",
     .summary = "solve a stage as built, compare meter readings, judge every rating",
     .description = "Solves a stage whose bias is known. With meter readings it also works out what this very tube "
                    "draws, how far it is from the usual one, and which cathode resistor would suit it.",
     .examples = {{"What 270 ohm does in the radio",
                   "platewright check --tube 6V6GT --supply 285V --load 5k --cathode-resistor 270"},
                  {"The meter says 12.9 V at the cathode and 282 V at the supply",
                   "platewright check as-built.xml --measured cathode=12.9V,supply=282V"}},
     .run = cli_run_check},
    {.name = "supply",
     .bit = CLI_SUPPLY,
     .positional = "[STAGE.xml]",
     .summary = "what the plate supply delivers under load; dummy load, bleeder, transformer",
     .description = "Says what the supply gives at the current of the stage, or at --current, by its readings or by "
                    "its transformer, rectifier and filter: volts, ripple, what its parts must stand; which resistor "
                    "makes it see the stage on the bench, what the meter then reads, and what another reading means.",
     .examples = {{"A winding of 215 V each half, and one reading on the bench",
                   "platewright supply --winding 215V --rectifier full-wave --reading 258V@10k --current 45mA"},
                  {"The supply of the radio, from its parts",
                   "platewright supply --tube 6V6GT --load 5k --winding 230V --rectifier full-wave --winding-ohms 180 "
                   "--reservoir 47uF --choke 8H --choke-ohms 180 --smoothing 47uF"},
                  {"Which transformer gives 285 V at 50 mA, of 15 % regulation",
                   "platewright supply --supply 285V --current 50mA --regulation 15%"}},
     .run = cli_run_supply},
    {.name = "plot",
     .bit = CLI_PLOT,
     .positional = "[STAGE.xml]",
     .summary = "draw the load line, the transfer curve with the resistor's line, the supply, or a tube's curves",
     .description = "Writes a gnuplot script, complete in itself, and has gnuplot draw it. Without a bias it chooses "
                    "the cathode resistor as design does. The plate family of a tube needs the tube alone.",
     .examples = {{"The load line of the radio, as a drawing and a script",
                   "platewright plot quay-radio.xml --output load-line.svg"},
                  {"How the resistor sets the bias, to be printed",
                   "platewright plot quay-radio.xml --kind transfer --output bias.pdf"},
                  {"The script alone, to be changed by hand",
                   "platewright plot --tube 2A3 --supply 300V --load 2.5k --output radiogram.gp"},
                  {"The curves of a tube connected as a triode, with what is printed of it",
                   "platewright plot --kind family --tube EL84 --connection triode --output EL84.svg"}},
     .run = cli_run_plot},
    {.name = "tubes",
     .bit = CLI_TUBES,
     .positional = "[TYPE]",
     .summary = "list the tubes of the catalogue, all that is known of one, or types like one",
     .description = "Lists every tube with its base, its ratings and how far its model may be trusted; or shows one "
                    "type with its ratings, pins, published rows and their sources; or the types that are nearest to "
                    "one by their curves, ratings, heater and base, and what would change with each.",
     .examples = {{"All of them", "platewright tubes"},
                  {"One of them", "platewright tubes EL84"},
                  {"Octal beam tubes of 10 W and more for a 6.3 V winding",
                   "platewright tubes --kind beam --base octal --least-watts 10W --heater 6.3V"},
                  {"The radio's tube is not to be had: what comes near it", "platewright tubes --like 6V6GT"}},
     .run = cli_run_tubes},
    {.name = "fit",
     .bit = CLI_FIT,
     .positional = "FILE",
     .positional_required = true,
     .summary = "work out a tube's coefficients from its published rows and points",
     .description =
         "Fits the characteristic law to what a tube file (FILE.xml) holds of printed rows and points, or to "
         "a table of them (FILE.csv) together with the options below. Shows every figure given beside the "
         "model's, what the data leave open, and which figures cannot be right. A table names its columns "
         "in the first line, in any order: plate_volts, screen_volts, grid_volts, cathode_resistor_ohms, "
         "drive_peak_volts, plate_ma, screen_ma, plate_ma_full_drive, screen_ma_full_drive, gm_umho, "
         "plate_resistance_ohms, mu, load_ohms, power_watts, thd_percent, second_percent, third_percent, "
         "uncertainty_percent, kind, connection, confidence, how, source, note. What is not known stays "
         "empty; one row with gm and plate resistance is enough for a first answer.",
     .examples = {{"See how well the rows of a tube file of one's own hang together", "platewright fit 6V6GT.xml"},
                  {"The same, and keep the coefficients", "platewright fit 6V6GT.xml --output 6V6GT.xml"},
                  {"A tube that is in no catalogue, from its sheet typed into a table",
                   "platewright fit sheet.csv --type 6X99 --kind beam --heater-volts 6.3V --heater-amps 450mA "
                   "--plate-volts 315V --screen-volts 285V --plate-watts 12W --screen-watts 2W --rating-system "
                   "design-center --source 'A sheet, a maker, 1938' --output 6X99.xml --plot 6X99.svg"}},
     .run = cli_run_fit},
};

enum { COMMANDS = sizeof commands / sizeof commands[0] };

const cli_command *cli_command_at(size_t index) {
    return index < COMMANDS ? &commands[index] : NULL;
}

const cli_command *cli_command_find(const char *name) {
    for (size_t i = 0; i < COMMANDS; i++) {
        if (strcmp(commands[i].name, name) == 0) {
            return &commands[i];
        }
    }
    return NULL;
}

const char *cli_command_nearest(const char *name) {
    const char *names[COMMANDS];
    for (size_t i = 0; i < COMMANDS; i++) {
        names[i] = commands[i].name;
    }
    size_t found = 0;
    return plw_nearest_names(name, names, COMMANDS, &found, 1) == 1 ? names[found] : NULL;
}
