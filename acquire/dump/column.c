/* Columns: decimals become integers with a scale, which is lossless, half the size and quicker to read than
 * doubles. The integers stay below 2^53, so that the double a text means is its integer divided once by a
 * power of ten: the correctly rounded value as long as there are at most 22 decimals [CL90, section 3].
 */
#include "acquire/dump/column.h"

#include "anelast/number.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { DECIMALS_MOST = 15, POWERS = 23 };

static const double power_of_ten[POWERS] = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,
                                            1e8,  1e9,  1e10, 1e11, 1e12, 1e13, 1e14, 1e15,
                                            1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};

static const int64_t exact_most = INT64_C(1) << 53;

void an_column_init(an_column *column, bool keeps_places)
{
    memset(column, 0, sizeof *column);
    column->keeps_places = keeps_places;
}

void an_column_release(an_column *column)
{
    free(column->samples);
    free(column->places);
    an_column_init(column, column->keeps_places);
}

void an_column_clear(an_column *column)
{
    column->n = 0;
    column->real = false;
    column->decimals = 0;
}

static an_status grow(an_column *column, size_t wanted, an_error *err)
{
    if (wanted <= column->room)
        return AN_OK;
    size_t room = column->room ? 2 * column->room : 1024;
    while (room < wanted)
        room *= 2;
    an_sample *samples = realloc(column->samples, room * sizeof *samples);
    if (!samples)
        return an_fail_memory(err, "the samples of a burst");
    column->samples = samples;
    if (column->keeps_places) {
        signed char *places = realloc(column->places, room);
        if (!places)
            return an_fail_memory(err, "the samples of a burst");
        column->places = places;
    }
    column->room = room;
    return AN_OK;
}

double an_column_value(const an_column *column, size_t i)
{
    return column->real ? column->samples[i].real
                        : (double)column->samples[i].integer / power_of_ten[column->decimals];
}

double an_column_place(const an_column *column, size_t i)
{
    int place = column->places[i];
    if (place <= 0 && -place < POWERS)
        return 1 / power_of_ten[-place];
    return pow(10, place);
}

static void become_real(an_column *column)
{
    for (size_t i = 0; i < column->n; i++)
        column->samples[i].real = an_column_value(column, i);
    column->real = true;
}

/* mantissa * 10^more, or false where that passes 2^53. */
static bool scale_up(int64_t *mantissa, int more)
{
    if (more == 0)
        return llabs(*mantissa) <= exact_most;
    double scaled = (double)*mantissa * power_of_ten[more];
    if (more > DECIMALS_MOST || !(fabs(scaled) <= (double)exact_most))
        return false;
    *mantissa *= (int64_t)power_of_ten[more];
    return true;
}

/* Give all samples more decimals; false where one would not fit any more. */
static bool raise_decimals(an_column *column, int decimals)
{
    int more = decimals - column->decimals;
    for (size_t i = 0; i < column->n; i++) {
        int64_t probe = column->samples[i].integer;
        if (!scale_up(&probe, more))
            return false;
    }
    for (size_t i = 0; i < column->n; i++)
        scale_up(&column->samples[i].integer, more);
    column->decimals = decimals;
    return true;
}

/* Add a fixed decimal as an integer; false where the column has to become one of doubles. */
static bool add_decimal(an_column *column, int64_t mantissa, int decimals)
{
    if (decimals > DECIMALS_MOST || llabs(mantissa) > exact_most)
        return false;
    if (decimals > column->decimals && !raise_decimals(column, decimals))
        return false;
    if (!scale_up(&mantissa, column->decimals - decimals))
        return false;
    column->samples[column->n].integer = mantissa;
    return true;
}

/* The power of ten of the last digit of a number, "1.50e-3" -> -5. */
static int last_place(const char *text, size_t n, char decimal_mark)
{
    int decimals = 0, behind = 0;
    int64_t exponent = 0;
    for (size_t i = 0; i < n; i++) {
        if (text[i] == decimal_mark) {
            behind = 1;
        } else if (text[i] == 'e' || text[i] == 'E') {
            an_number_integer(text + i + 1, n - i - 1, &exponent);
            break;
        } else {
            decimals += behind;
        }
    }
    int64_t place = exponent - decimals;
    return (int)(place < -100 ? -100 : place > 100 ? 100 : place);
}

an_status an_column_add_text(an_column *column, const char *text, size_t n, char decimal_mark, double *value,
                             an_error *err)
{
    int64_t mantissa;
    int decimals = 0;
    double real = NAN;
    AN_TRY(grow(column, column->n + 1, err));
    bool fixed = an_number_decimal(text, n, decimal_mark, &mantissa, &decimals);
    bool done = fixed && !column->real && add_decimal(column, mantissa, decimals);
    if (!done || value) {
        if (fixed && decimals < POWERS && llabs(mantissa) <= exact_most)
            real = (double)mantissa / power_of_ten[decimals];
        else if (!an_number_parse(text, n, decimal_mark, &real))
            return AN_E_VALUE;
    }
    if (!done) {
        if (!column->real)
            become_real(column);
        column->samples[column->n].real = real;
    }
    if (column->keeps_places)
        column->places[column->n] = (signed char)(fixed ? -decimals : last_place(text, n, decimal_mark));
    column->n++;
    if (value)
        *value = real;
    return AN_OK;
}

an_status an_column_add_real(an_column *column, double value, an_error *err)
{
    AN_TRY(grow(column, column->n + 1, err));
    if (!column->real)
        become_real(column);
    if (column->keeps_places)
        column->places[column->n] = -100;
    column->samples[column->n++].real = value;
    return AN_OK;
}

an_status an_column_add_integer(an_column *column, int64_t value, an_error *err)
{
    AN_TRY(grow(column, column->n + 1, err));
    if (!column->real && !add_decimal(column, value, 0))
        become_real(column);
    if (column->real)
        column->samples[column->n].real = (double)value;
    if (column->keeps_places)
        column->places[column->n] = 0;
    column->n++;
    return AN_OK;
}

void an_column_drop(an_column *column, const size_t *rows, size_t n_rows)
{
    size_t kept = 0, i_row = 0;
    for (size_t i = 0; i < column->n; i++) {
        if (i_row < n_rows && rows[i_row] == i) {
            i_row++;
            continue;
        }
        column->samples[kept] = column->samples[i];
        if (column->keeps_places)
            column->places[kept] = column->places[i];
        kept++;
    }
    column->n = kept;
}

an_status an_column_move_tail(an_column *column, size_t first, an_column *other, an_error *err)
{
    size_t n = column->n - first;
    AN_TRY(grow(other, n, err));
    memcpy(other->samples, column->samples + first, n * sizeof *column->samples);
    if (column->keeps_places)
        memcpy(other->places, column->places + first, n);
    other->n = n;
    other->real = column->real;
    other->decimals = column->decimals;
    column->n = first;
    return AN_OK;
}

/* The smallest integer coding that holds all samples, or none. */
static bool integer_coding(const an_column *column, an_signal_coding *coding)
{
    int64_t least = 0, most = 0;
    for (size_t i = 0; i < column->n; i++) {
        int64_t value = column->samples[i].integer;
        least = value < least ? value : least;
        most = value > most ? value : most;
    }
    *coding = least >= INT16_MIN && most <= INT16_MAX ? AN_CODING_INT16 : AN_CODING_INT32;
    return least >= INT32_MIN && most <= INT32_MAX;
}

static void fill_data(const an_column *column, an_signal *signal)
{
    for (size_t i = 0; i < column->n; i++) {
        if (signal->coding == AN_CODING_INT16)
            ((int16_t *)signal->data)[i] = (int16_t)column->samples[i].integer;
        else if (signal->coding == AN_CODING_INT32)
            ((int32_t *)signal->data)[i] = (int32_t)column->samples[i].integer;
        else
            ((double *)signal->data)[i] = an_column_value(column, i);
    }
}

an_status an_column_signal(const an_column *column, an_signal_quantity quantity,
                           const an_conversion *conversion, double gain, an_signal *signal, an_error *err)
{
    an_signal_coding coding = AN_CODING_FLOAT64;
    bool integers = !column->real && integer_coding(column, &coding);
    if (!integers)
        coding = AN_CODING_FLOAT64;
    AN_TRY(an_signal_allocate(signal, quantity, coding, column->n, err));
    signal->scale = conversion->factor * gain;
    signal->divisor = conversion->divisor * (integers ? power_of_ten[column->decimals] : 1);
    signal->offset = conversion->offset;
    fill_data(column, signal);
    return AN_OK;
}
