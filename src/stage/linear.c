/* Small currents about the point of rest.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "stage/linear.h"

#include "base/numeric.h"

bool plw_linear_currents(const plw_circuit *circuit, const plw_quiescent *quiescent,
                         const double source_volts[PLW_ELECTRODES], double amps[PLW_FLOWS]) {
    plw_currents c;
    const double screen_volts = circuit->has_screen ? quiescent->screen_volts : 0.0;
    plw_law_evaluate(&circuit->stage->tube->model.law, quiescent->plate_volts, screen_volts, quiescent->grid_volts, &c);
    const double conductance[PLW_FLOWS][PLW_ELECTRODES] = {
        [PLW_OF_PLATE] = {c.plate_by_plate, c.plate_by_screen, c.plate_by_grid},
        [PLW_OF_SCREEN] = {c.screen_by_plate, c.screen_by_screen, c.screen_by_grid}};
    double matrix[2][2] = {{1.0, 0.0}, {0.0, 1.0}};
    double right[2] = {0.0, 0.0};
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        for (int at = 0; at < PLW_ELECTRODES; at++) {
            right[flow] += conductance[flow][at] * source_volts[at];
            for (int other = 0; other < PLW_FLOWS; other++) {
                matrix[flow][other] += conductance[flow][at] * circuit->feed.ohms[at][other];
            }
        }
    }
    const double held[2][2] = {{matrix[0][0], matrix[0][1]}, {matrix[1][0], matrix[1][1]}};
    return plw_solve_2x2(held, right, amps);
}
