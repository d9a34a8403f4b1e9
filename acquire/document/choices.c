/* The table of choices: every threshold and word that a lab may set, with its default and where that comes
 * from. Values are shown in the row's unit; the code gets them in SI. "default" as a source means: our own,
 * to be replaced by the lab's.
 */
#include "anelast/procedure.h"

#define SIMPLE_SOURCE "default; 0.85 was found for a simple material, 470 for two phases, on made data"

/* name, unit, words, standard, least, most, stage, help, source */
static const an_choice table[] = {
    /* ---- phase ---- */
    {"settled_ratio", "1", NULL, "0.005", 0, 1, "phase",
     "Successive cycles agree when |K| changes by less than this part", "default"},
    {"settled_angle", "deg", NULL, "0.1", 0, 90, "phase",
     "Successive cycles agree when the loss angle changes by less than this", "default"},
    {"cycles_least", "1", NULL, "3", 1, 1000, "phase", "Whole cycles that must be left after the start-up",
     "common practice"},
    {"harmonics", "1", NULL, "5", 1, 20, "phase", "Highest harmonic fitted along with the first", "default"},
    {"drift_degree", "1", NULL, "2", 0, 4, "phase", "Degree of the polynomial that takes up drift",
     "default"},
    {"decay_terms", "1", NULL, "2", 0, 2, "phase",
     "Decaying exponentials in the fit that take up what is left of the start-up",
     "default; found to leave no bias on made data started from rest"},
    {"third_harmonic_note", "1", NULL, "0.005", 0, 1, "phase",
     "Third harmonic of force over the first, noted from here on", "common practice"},
    {"third_harmonic_flag", "1", NULL, "0.01", 0, 1, "phase",
     "Third harmonic of force over the first, flagged from here on", "common practice"},
    {"second_harmonic_flag", "1", NULL, "0.02", 0, 1, "phase",
     "Second harmonic of force over the first, flagged from here on", "common practice"},
    {"snr_flag", "dB", NULL, "40", 0, 200, "phase", "Signal over noise below which a burst is flagged",
     "default"},
    {"snr_skip", "dB", NULL, "10", 0, 200, "phase", "Signal over noise below which a burst is dropped",
     "default"},
    {"frequency_flag", "1", NULL, "0.005", 0, 1, "phase",
     "Departure from the set frequency, as a part of it, flagged from here on", "default"},
    {"frequency_halt", "1", NULL, "0.05", 0, 1, "phase",
     "Departure from the set frequency, as a part of it, refused from here on", "default"},
    {"missing_skip", "1", NULL, "0.001", 0, 1, "phase",
     "Part of a burst's values that may be missing before it is dropped", "default"},
    {"clipped_least", "1", NULL, "3", 2, 1000, "phase",
     "Equal extreme samples in a row that count as clipping", "default"},
    {"jitter_flag", "1", NULL, "0.02", 0, 10, "phase",
     "Scatter of the sampling times, as a part of the interval, flagged from here on", "default"},
    {"mains_flag", "dB", NULL, "-40", -200, 0, "phase",
     "Mains line in the force against its amplitude, flagged from here on", "default"},
    {"temperature_frozen", "s", NULL, "1200", 0, 1e9, "phase",
     "Time over which a temperature that does not change at all is taken for a dead channel",
     "common practice"},
    {"counts_least", "1", NULL, "100", 1, 1e6, "phase", "Amplitude in counts below which a burst is flagged",
     "default"},
    {"samples_least", "1", NULL, "20", 3, 1e5, "phase", "Samples in a cycle below which a burst is flagged",
     "common practice"},
    /* ---- correct ---- */
    {"compliance_flag", "1", NULL, "0.5", 0, 1e3, "correct",
     "Specimen stiffness times frame compliance, flagged and held from here on", "default"},
    {"compliance_refuse", "1", NULL, "1", 0, 1e3, "correct",
     "Specimen stiffness times frame compliance, refused from here on", "default"},
    {"compliance_sampling", "1", NULL, "0.3", 0, 1e3, "correct",
     "Specimen stiffness times frame compliance from which uncertainty is found by Monte Carlo",
     "default; JCGM 101"},
    {"correction_flag", "1", NULL, "0.5", 0, 1e3, "correct",
     "Change of the stiffness by one rung of the ladder, as a part, flagged from here on", "default"},
    {"dimension_uncertainty", "1", NULL, "0.005", 0, 1, "correct",
     "Relative standard uncertainty of a dimension that came without one",
     "default; what a calliper does on a millimetre or two"},
    {"modulus_least", "Pa", NULL, "1e3", 0, 1e15, "correct", "Modulus below which a unit must be wrong",
     "default"},
    {"modulus_most", "Pa", NULL, "1e12", 0, 1e15, "correct", "Modulus above which a unit must be wrong",
     "default"},
    /* ---- grid ---- */
    {"isotherm_width", "K", NULL, "0.5", 0, 50, "grid", "Temperatures within this belong to one isotherm",
     "default"},
    {"isotherm_drift", "K/min", NULL, "0.1", 0, 50, "grid",
     "Rate of temperature up to which a burst is steady", "default"},
    {"repeat_flag", "1", NULL, "0.02", 0, 1, "grid",
     "Change of a repeated burst, as a part, flagged from here on", "default"},
    /* ---- superpose ---- */
    {"vertical", NULL, "none density-temperature free", "none", 0, 0, "superpose",
     "Vertical shifts: none, b = rho T / (rho0 T0), or free", "default"},
    {"reference_temperature", "K", "auto", "auto", 1, 2000, "superpose",
     "Temperature to which isotherms are shifted; auto takes the isotherm with most overlap", "default"},
    {"law", NULL, "auto wlf arrhenius vft crossover polynomial", "auto", 0, 0, "superpose",
     "Law of the shift factors; auto chooses by an information criterion", "default"},
    {"simple_chi_square", "1", NULL, "2", 0, 1e6, "superpose",
     "Reduced chi-square up to which superposition is simple", SIMPLE_SOURCE},
    {"doubtful_chi_square", "1", NULL, "5", 0, 1e6, "superpose",
     "Reduced chi-square up to which superposition is doubtful, complex beyond", SIMPLE_SOURCE},
    {"simple_separation", "deg", NULL, "1", 0, 90, "superpose",
     "Spread of loss angles at equal |E*| up to which superposition is simple", "default"},
    {"doubtful_separation", "deg", NULL, "3", 0, 90, "superpose",
     "Spread of loss angles at equal |E*| up to which superposition is doubtful, complex beyond", "default"},
    {"vertical_flag", "1", NULL, "0.1", 0, 10, "superpose", "Vertical shift, as a part, flagged from here on",
     "default"},
    {"override_complex", NULL, "no yes", "no", 0, 0, "superpose",
     "Hand over a spectrum of a material called complex; whoever sets this answers for it", "default"},
    /* ---- spectrum ---- */
    {"modes_per_decade", "1", NULL, "4", 1, 20, "spectrum", "Modes a decade of the dense spectrum",
     "common practice"},
    {"mode_error", "1", NULL, "0.01", 1e-5, 1, "spectrum",
     "Error, as a part, that the handed-over modes may add to the fit", "default"},
    {"long_term", NULL, "auto solid liquid", "auto", 0, 0, "spectrum",
     "Whether there is a long-term modulus; auto lets the data decide", "default"},
};

_Static_assert(sizeof table / sizeof table[0] <= AN_CHOICES_MOST, "AN_CHOICES_MOST is too small");

const an_choice *an_choice_row(size_t i_row)
{
    return i_row < sizeof table / sizeof table[0] ? &table[i_row] : NULL;
}
