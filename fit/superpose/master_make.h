/* fit/superpose/master_make.h: from a grid to a master document, shared by its files. Not installed. */
#ifndef ANELAST_FIT_MASTER_MAKE_H
#define ANELAST_FIT_MASTER_MAKE_H

#include "anelast/master.h"

/* The isotherms and cells of a grid that take part, as the numerics want them. */
typedef struct an_selection {
    an_superpose_input input;
    an_superpose_isotherm *isotherm; /* [input.n_isotherm] owned */
    an_superpose_point *point;       /* [input.n_point] owned */
    double *common;                  /* [input.n_point][AN_SOURCE_COUNT][2] Pa, owned */
    int *isotherm_of;                /* [input.n_isotherm] index into the grid's isotherms, owned */
    int *cell_of;                    /* [input.n_point] index into the grid's cells, owned */
} an_selection;

/* an_selection_make: heating or cooling, whichever holds more cells, because the glassy state hangs on
 * history; cells that are marked, not finite or without a positive definite noise are left out. What is left
 * out stands as remarks. selection [out] zeros; clear with an_selection_clear, also after a refusal Returns
 * AN_OK, AN_E_SCIENCE where fewer than two isotherms are left, AN_E_MEMORY. */
an_status an_selection_make(const an_grid *grid, an_selection *selection, an_remark_list *remarks,
                            an_error *err);
void an_selection_clear(an_selection *selection);

/* Where a superposition is to be referred, and the laws tried on it. */
typedef struct an_move {
    double temperature_K; /* K, inside the isotherms */
    an_law_trial *trial;  /* [n_trial] moved along */
    size_t n_trial;
} an_move;

/* an_superposition_move: refer a superposition and the laws tried on it to another temperature, by the law
 * chosen. The variance of the law there is added to all shifts. Returns AN_OK, AN_E_SCIENCE where the
 * temperature is outside, or no law stands. */
an_status an_superposition_move(const an_superpose_input *input, const an_move *move,
                                an_superposition *result, an_error *err);

#endif
