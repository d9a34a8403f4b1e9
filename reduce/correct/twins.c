/* Bursts that repeat an earlier one byte for byte: a dump that was written twice, or a buffer that was sent twice. No
 * measured noise repeats itself, and counted twice such a burst would make the noise look smaller than it is. Stage:
 * correct.
 */
#include "reducer.h"

#include "anelast/hash.h"

#include <stdlib.h>
#include <string.h>

struct an_twin {
    char sha256[AN_SHA256_SIZE];
    int burst;
};

static an_status hash_samples(const an_samples *s, char sha256[AN_SHA256_SIZE], an_error *err)
{
    const double *const series[] = {s->y[AN_DISPLACEMENT], s->y[AN_FORCE], s->temperature};
    an_sha256 *hash = an_sha256_new();
    an_status status = hash ? AN_OK : AN_E_MEMORY;
    for (int i = 0; i < 3 && status >= 0; i++)
        if (series[i])
            status = an_sha256_add(hash, series[i], (size_t)s->n * sizeof *series[i]);
    if (status >= 0)
        status = an_sha256_finish(hash, sha256);
    an_sha256_free(&hash);
    return status < 0 ? an_fail_memory(err, "a hash") : AN_OK;
}

static an_status remember(an_twins *twins, const struct an_twin *one, an_error *err)
{
    if (twins->n == twins->room) {
        int room = 2 * twins->room + 64;
        struct an_twin *grown = realloc(twins->row, (size_t)room * sizeof *grown);
        if (!grown)
            return an_fail_memory(err, "the hashes of bursts");
        twins->row = grown;
        twins->room = room;
    }
    twins->row[twins->n++] = *one;
    return AN_OK;
}

an_status an_twins_judge(an_twins *twins, an_reduction *r, an_error *err)
{
    struct an_twin one = {.burst = r->burst->n};
    if (r->samples.n < 2)
        return AN_OK;
    AN_TRY(hash_samples(&r->samples, one.sha256, err));
    for (int i = 0; i < twins->n; i++)
        if (strcmp(twins->row[i].sha256, one.sha256) == 0)
            return an_remark_list_add(&r->point->remarks, "duplicate-burst", one.burst, err,
                                      "it repeats burst %d byte for byte", twins->row[i].burst);
    return remember(twins, &one, err);
}

void an_twins_clear(an_twins *twins)
{
    free(twins->row);
    *twins = (an_twins){0};
}
