/* grid_write.c: the grid document written, in the form of schema/grid.xsd. A cell is written like a point of
 * the points document, so that one reader of tables does for both.
 */
#include "anelast/grid.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static void put_modulus(an_xml_writer *writer, const char *name, double value, double noise, double common)
{
    an_xml_start(writer, name);
    an_xml_put_double(writer, "value", value);
    an_xml_put(writer, "unit", "Pa");
    an_xml_put_double(writer, "u_noise", sqrt(fmax(noise, 0)));
    an_xml_put_double(writer, "u_common", sqrt(fmax(common, 0)));
    an_xml_end(writer);
}

static void put_loss_factor(an_xml_writer *writer, const an_point *as_point)
{
    double value, u_noise, u_common;
    an_point_loss_factor(as_point, &value, &u_noise, &u_common);
    an_xml_start(writer, "loss_factor");
    an_xml_put_double(writer, "value", value);
    an_xml_put(writer, "unit", "1");
    an_xml_put_double(writer, "u_noise", u_noise);
    an_xml_put_double(writer, "u_common", u_common);
    an_xml_end(writer);
}

static void put_covariances(an_xml_writer *writer, const an_cell *cell)
{
    an_xml_start(writer, "noise");
    an_xml_put_double(writer, "storage_storage", cell->noise[0]);
    an_xml_put_double(writer, "storage_loss", cell->noise[1]);
    an_xml_put_double(writer, "loss_loss", cell->noise[2]);
    an_xml_put(writer, "unit", "Pa2");
    an_xml_end(writer);
    for (int i = 0; i < AN_SOURCE_COUNT; i++) {
        if (cell->common[i][0] == 0 && cell->common[i][1] == 0)
            continue;
        an_xml_start(writer, "common");
        an_xml_put(writer, "source", an_source_word((an_source)i));
        an_xml_put_double(writer, "storage", cell->common[i][0]);
        an_xml_put_double(writer, "loss", cell->common[i][1]);
        an_xml_put(writer, "unit", "Pa");
        an_xml_end(writer);
    }
}

static void put_cell(an_xml_writer *writer, const an_cell *cell)
{
    double common[3];
    an_point as_point = {.storage_Pa = cell->storage_Pa, .loss_Pa = cell->loss_Pa};
    memcpy(as_point.noise, cell->noise, sizeof as_point.noise);
    memcpy(as_point.common, cell->common, sizeof as_point.common);
    an_point_common(&as_point, common);
    an_xml_start(writer, "cell");
    an_xml_put_integer(writer, "burst", cell->burst);
    an_xml_put_integer(writer, "repeats", cell->n_repeat);
    if (cell->outlier)
        an_xml_put(writer, "outlier", "true");
    an_xml_put_measure(writer, "temperature", (an_measure){cell->temperature_K, NAN}, "K");
    an_xml_put_measure(writer, "frequency", (an_measure){cell->frequency_Hz, NAN}, "Hz");
    put_modulus(writer, "storage", cell->storage_Pa, cell->noise[0], common[0]);
    put_modulus(writer, "loss", cell->loss_Pa, cell->noise[2], common[2]);
    put_loss_factor(writer, &as_point);
    put_covariances(writer, cell);
    an_remark_list_write(writer, &cell->remarks, -1);
    an_xml_end(writer);
}

static void put_isotherm(an_xml_writer *writer, const an_grid *grid, int i_isotherm)
{
    const an_isotherm *isotherm = &grid->isotherm[i_isotherm];
    an_xml_start(writer, "isotherm");
    an_xml_put_integer(writer, "n", i_isotherm + 1);
    an_xml_put(writer, "direction", isotherm->cooling ? "cooling" : "heating");
    an_xml_put(writer, "steady", isotherm->steady ? "true" : "false");
    an_xml_put_measure(writer, "temperature",
                       (an_measure){isotherm->temperature_K, isotherm->u_temperature_K}, "K");
    an_xml_put_measure(writer, "set_temperature", (an_measure){isotherm->set_temperature_K, NAN}, "K");
    an_xml_put_measure(writer, "spread", (an_measure){isotherm->drift_K, NAN}, "K");
    an_xml_put_measure(writer, "rate", (an_measure){isotherm->rate_K_s, isotherm->u_rate_K_s}, "K/s");
    for (int i = 0; i < isotherm->n_cell; i++)
        put_cell(writer, &grid->cell[isotherm->first_cell + i]);
    an_xml_end(writer);
}

static void put_ramp(an_xml_writer *writer, const an_grid *grid)
{
    if (grid->n_ramp == 0)
        return;
    an_xml_start(writer, "ramp");
    for (int i = 0; i < grid->n_ramp; i++)
        put_cell(writer, &grid->ramp[i]);
    an_xml_end(writer);
}

static void put_reading(an_xml_writer *writer, const an_reading *reading)
{
    an_xml_start(writer, "reading");
    an_xml_put(writer, "kind", an_reading_word(reading->kind));
    an_xml_put(writer, "from", reading->on_ramp ? "ramp" : "isotherms");
    an_xml_put(writer, "refused", reading->reason[0] ? reading->reason : NULL);
    an_xml_put_measure(writer, "frequency", (an_measure){reading->frequency_Hz, NAN}, "Hz");
    if (!reading->reason[0]) {
        an_xml_start(writer, "temperature");
        an_xml_put_double(writer, "value", reading->temperature_K);
        an_xml_put(writer, "unit", "K");
        an_xml_put_double(writer, "u_noise", reading->u_noise_K);
        an_xml_put_double(writer, "u_form", reading->u_form_K);
        an_xml_put_double(writer, "u_common", reading->u_common_K);
        an_xml_end(writer);
    }
    an_xml_end(writer);
}

void an_assessment_write(an_xml_writer *writer, const an_assessment *assessment)
{
    an_xml_start(writer, "assessment");
    an_xml_put(writer, "verdict", an_verdict_word(assessment->verdict));
    an_xml_put_integer(writer, "used", assessment->n_used);
    an_xml_put_integer(writer, "flagged", assessment->n_flagged);
    an_xml_put_integer(writer, "skipped", assessment->n_skipped);
    for (int i = 0; i < assessment->n_reason; i++) {
        an_xml_start(writer, "reason");
        an_xml_put_text(writer, assessment->reason[i]);
        an_xml_end(writer);
    }
    an_xml_start(writer, "largest_correction");
    an_xml_put_text(writer, assessment->largest_correction);
    an_xml_end(writer);
    an_xml_end(writer);
}

static void put_scatter(an_xml_writer *writer, const an_scatter *scatter)
{
    an_xml_start(writer, "scatter");
    an_xml_put_integer(writer, "runs", scatter->n_run);
    an_xml_put_measure(writer, "within_modulus", (an_measure){scatter->within_modulus, NAN}, "1");
    an_xml_put_measure(writer, "within_delta", (an_measure){scatter->within_delta_rad, NAN}, "rad");
    an_xml_put_measure(writer, "between_modulus", (an_measure){scatter->between_modulus, NAN}, "1");
    an_xml_put_measure(writer, "between_delta", (an_measure){scatter->between_delta_rad, NAN}, "rad");
    an_xml_end(writer);
}

void an_grid_write(an_xml_writer *writer, const an_grid *grid)
{
    an_xml_put(writer, "id", grid->id);
    an_made_write(writer, &grid->made);
    an_specimen_write(writer, &grid->specimen);
    an_apparatus_write(writer, &grid->apparatus);
    an_remark_list_write(writer, &grid->remarks, -1);
    an_assessment_write(writer, &grid->assessment);
    an_xml_put_measure(writer, "strain_most", (an_measure){grid->strain_most, NAN}, "1");
    for (int i = 0; i < grid->n_isotherm; i++)
        put_isotherm(writer, grid, i);
    put_ramp(writer, grid);
    for (int i = 0; i < grid->n_reading; i++)
        put_reading(writer, &grid->reading[i]);
    put_scatter(writer, &grid->scatter);
}
