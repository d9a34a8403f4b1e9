/* anelast/apparatus.h: what stands between the specimen and the numbers of the dump. A written document of
 * the acquire floor; a run carries a copy. A constant that nobody gave is 0 with u = 0 (an ideal part),
 * except where said.
 */
#ifndef ANELAST_APPARATUS_H
#define ANELAST_APPARATUS_H

#include "anelast/quantity.h"
#include "anelast/status.h"
#include "anelast/xml.h"

typedef enum an_force_at { AN_FORCE_AT_DRIVE = 0, AN_FORCE_AT_FIXED_END } an_force_at;

/* One channel's response, measured / true = gain exp(+i omega delay): a sample taken `delay` after its time
 * stamp shows the later, advanced phase. A filter that lags by d seconds is therefore a delay of -d. */
typedef struct an_channel_response {
    an_measure
        gain; /* [1] measured / true; 1 where not given, u = relative standard uncertainty of calibration */
    an_measure delay; /* [s] by which the channel is sampled after its time stamp; positive = sampled late */
} an_channel_response;

/* One row of a calibrated complex compliance, C* = compliance (1 - i loss_factor) with loss_factor >= 0. */
typedef struct an_compliance_row {
    double frequency_Hz;   /* [Hz] NAN: all */
    double temperature_K;  /* [K] NAN: all */
    an_measure compliance; /* [m/N], or [rad/(N.m)] in torsion */
    double loss_factor;    /* [1] */
} an_compliance_row;

enum { AN_COMPLIANCE_ROWS = 64 };

typedef struct an_apparatus {
    char id[96];
    an_force_at force_at;
    an_channel_response force, displacement;
    an_measure moving_mass;          /* [kg], or [kg.m2] in torsion; at the drive */
    an_measure shaft_stiffness;      /* [N/m] */
    an_measure shaft_damping;        /* [N.s/m] */
    an_measure transducer_stiffness; /* [N/m] force at the fixed end; NAN: rigid */
    an_measure fixture_mass;         /* [kg] between specimen and transducer, force at the fixed end */
    int n_compliance;
    an_compliance_row compliance[AN_COMPLIANCE_ROWS]; /* none: rigid frame */
    an_measure temperature_bias; /* [K] to subtract from what the channel says; u: common uncertainty */
    char calibrated[40], valid_until[40]; /* xs:date or xs:dateTime; "" not given */
    char certificate[128];
} an_apparatus;

void an_apparatus_init(an_apparatus *apparatus);

/* an_apparatus_load, _from_node, _write: as for the specimen (anelast/specimen.h). */
an_status an_apparatus_load(const char *path, an_apparatus *apparatus, char sha256[65], an_error *err);
an_status an_apparatus_from_node(const an_xml_node *node, an_apparatus *apparatus, an_error *err);
void an_apparatus_write(an_xml_writer *writer, const an_apparatus *apparatus);

/* an_apparatus_compliance: the frame's complex compliance at a frequency and temperature: the only row, or
 * linear between the nearest rows in log f and in T, the nearest row outside. frequency_Hz [in, Hz];
 * temperature_K [in, K]; storage, loss [out, m/N] with C* = storage - i loss; u [out, m/N]. */
void an_apparatus_compliance(const an_apparatus *apparatus, double frequency_Hz, double temperature_K,
                             double *storage, double *loss, double *u);

#endif
