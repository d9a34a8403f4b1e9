/* The colour ramps of temperature and of frequency. Stage report. Each is one path through OKLab, a space in
 * which equal steps look equal [OKLAB]: lightness and hue run linearly, chroma is constant but where the
 * display's gamut is narrower, there it is reduced with lightness and hue kept. The lightest end still has a
 * contrast of 3 on white, so that every colour serves for thin marks on a light ground. Range: fraction 0..1.
 */
#include "anelast/figure.h"

#include <math.h>

/* Ends of a path at fractions 0 and 1. */
typedef struct ramp {
    double lightness[2]; /* [1] of OKLab */
    double hue[2];       /* [degree] */
    double chroma;       /* [1] of OKLab */
} ramp;

/* Blue over violet and red to orange. */
static const ramp temperature = {{0.30, 0.665}, {262, 418}, 0.165};

/* One blue-green, from light to dark, so that nobody takes it for a temperature. */
static const ramp frequency = {{0.64, 0.30}, {195, 195}, 0.09};

typedef struct linear_rgb {
    double r, g, b; /* linear light, 0..1 inside the gamut */
} linear_rgb;

/* OKLab to linear sRGB, matrices of [OKLAB]. */
static linear_rgb from_oklab(double lightness, double a, double b)
{
    double l = lightness + 0.3963377774 * a + 0.2158037573 * b;
    double m = lightness - 0.1055613458 * a - 0.0638541728 * b;
    double s = lightness - 0.0894841775 * a - 1.2914855480 * b;
    l = l * l * l;
    m = m * m * m;
    s = s * s * s;
    return (linear_rgb){
        .r = 4.0767416621 * l - 3.3077115913 * m + 0.2309699292 * s,
        .g = -1.2684380046 * l + 2.6097574011 * m - 0.3413193965 * s,
        .b = -0.0041960863 * l - 0.7034186147 * m + 1.7076147010 * s,
    };
}

static bool in_gamut(linear_rgb c)
{
    return fmin(c.r, fmin(c.g, c.b)) >= 0 && fmax(c.r, fmax(c.g, c.b)) <= 1;
}

/* The largest chroma up to a given one that the gamut holds, by bisection. */
static linear_rgb most_colorful(double lightness, double hue, double chroma)
{
    double low = 0, high = chroma;
    for (int i = 0; i < 24; i++) {
        double middle = i == 0 ? high : (low + high) / 2;
        if (in_gamut(from_oklab(lightness, middle * cos(hue), middle * sin(hue))))
            low = middle;
        else
            high = middle;
    }
    return from_oklab(lightness, low * cos(hue), low * sin(hue));
}

/* Transfer function of IEC 61966-2-1, to eight bits. */
static uint32_t to_byte(double linear)
{
    double coded = linear <= 0.0031308 ? 12.92 * linear : 1.055 * pow(linear, 1 / 2.4) - 0.055;
    return (uint32_t)lround(255 * fmin(fmax(coded, 0), 1));
}

static uint32_t color_on(const ramp *path, double fraction)
{
    if (isnan(fraction))
        return AN_COLOR_MUTED;
    double f = fmin(fmax(fraction, 0), 1);
    double lightness = path->lightness[0] + f * (path->lightness[1] - path->lightness[0]);
    double hue = (path->hue[0] + f * (path->hue[1] - path->hue[0])) * M_PI / 180;
    linear_rgb c = most_colorful(lightness, hue, path->chroma);
    return to_byte(c.r) << 16 | to_byte(c.g) << 8 | to_byte(c.b);
}

uint32_t an_ramp_color(double fraction)
{
    return color_on(&temperature, fraction);
}

uint32_t an_tone_color(double fraction)
{
    return color_on(&frequency, fraction);
}

double an_ramp_fraction(double value, double from, double to)
{
    return to > from ? (value - from) / (to - from) : 0.5;
}
