/* anelast/specimen.h: what was tested, and its geometry. A written document of the acquire floor; a run
 * carries a copy.
 *
 * A length that nobody gave is NAN in `value`; an uncertainty that nobody gave is NAN in `u` and is replaced
 * by the procedure's default when budgets are made, which is then remarked upon. A written document may give
 * a dimension's uncertainty alone (`<width unit="mm" u="0.02"/>`) where the dump itself gives the value.
 */
#ifndef ANELAST_SPECIMEN_H
#define ANELAST_SPECIMEN_H

#include "anelast/quantity.h"
#include "anelast/remark.h"
#include "anelast/status.h"
#include "anelast/xml.h"

/* The rows of the geometry table; the words in documents are those of an_geometry_word. */
typedef enum an_geometry_kind {
    AN_GEOMETRY_NONE = 0,
    AN_TENSION,             /* "tension": film, strip, fibre */
    AN_COMPRESSION_FREE,    /* "compression, free faces" */
    AN_COMPRESSION_BONDED,  /* "compression, bonded" */
    AN_SHEAR_DOUBLE_LAP,    /* "shear, double lap" */
    AN_CANTILEVER_GUIDED,   /* "cantilever, guided end" */
    AN_CANTILEVER_FREE,     /* "cantilever, free end" */
    AN_CANTILEVER_DUAL,     /* "cantilever, dual" */
    AN_BENDING_THREE_POINT, /* "bending, three-point" */
    AN_TORSION_RECTANGLE,   /* "torsion, rectangle" */
    AN_TORSION_CYLINDER,    /* "torsion, cylinder" */
    AN_PARALLEL_PLATES,     /* "parallel plates" */
    AN_GEOMETRY_COUNT
} an_geometry_kind;

/* Dimensions, in the words of a drawing. Which of them a kind needs is an_specimen_check's business. */
typedef struct an_geometry {
    an_geometry_kind kind;
    an_measure length;        /* [m] free length, span, or length along the shear */
    an_measure width;         /* [m] */
    an_measure thickness;     /* [m] */
    an_measure diameter;      /* [m] of a round section */
    an_measure height;        /* [m] between the faces, of one piece */
    an_measure area;          /* [m2] of one loaded face; NAN: from width and thickness, or diameter */
    an_measure added_length;  /* [m] end correction, added to length; NAN: 0 */
    an_measure poisson;       /* [1] for the shear term of an isotropic beam; NAN: no shear term is applied */
    an_measure modulus_ratio; /* [1] E/G where it is not 2 (1 + poisson); NAN: from poisson */
    an_measure
        shape_factor; /* [1] loaded face over free surface, bonded compression; NAN: computed for a disc */
    an_measure bulk_modulus; /* [Pa] bonded compression; NAN: incompressible */
    an_measure expansion;    /* [1/K] linear thermal expansion of the specimen; NAN: not applied */
    an_measure measured_at; /* [K] temperature at which the dimensions were taken; NAN: room, not corrected */
} an_geometry;

typedef struct an_specimen {
    char id[96]; /* the specimen's own mark; "" not given */
    char material[128];
    char lot[96];
    char operator_name[96];
    char started[40]; /* xs:dateTime with zone, "" not given */
    char rig[96];     /* the instrument as the dump names it */
    an_geometry geometry;
} an_specimen;

/* an_geometry_word / an_geometry_find: the word of a kind, and the kind of a word (AN_GEOMETRY_NONE if
 * unknown). */
const char *an_geometry_word(an_geometry_kind kind);
an_geometry_kind an_geometry_find(const char *word);

/* an_geometry_is_shear: nonzero where the modulus found is a shear modulus G. */
int an_geometry_is_shear(an_geometry_kind kind);

/* an_specimen_init: everything "not given". */
void an_specimen_init(an_specimen *specimen);

/* an_specimen_load: read a written specimen document.  path [in] file; sha256 [out, nullable] hex of its
 * bytes. Returns AN_OK, or AN_E_IO, AN_E_DOCUMENT, AN_E_UNIT, AN_E_VALUE with the place. */
an_status an_specimen_load(const char *path, an_specimen *specimen, char sha256[65], an_error *err);

/* an_specimen_from_node / an_specimen_write: the element <specimen> as a document of its own and inside a
 * run. */
an_status an_specimen_from_node(const an_xml_node *node, an_specimen *specimen, an_error *err);
void an_specimen_write(an_xml_writer *writer, const an_specimen *specimen);

/* an_geometry_dimension: the measure of a dimension by its element's name ("length"), for who fills a
 * geometry by name. unit [out, nullable] its SI unit Returns NULL where there is no such dimension. */
an_measure *an_geometry_dimension(an_geometry *geometry, const char *name, const char **unit);

/* an_specimen_label: the text of an attribute by its name ("id", "material", "lot", "operator", "started",
 * "rig"). size [out] bytes of room, with the final zero byte Returns NULL where there is no such text. */
char *an_specimen_label(an_specimen *specimen, const char *name, size_t *size);

/* an_specimen_merge: what `over` gives replaces what `base` gives (documents over the dump's own head); where
 * both give a dimension and differ by more than 3 combined standard uncertainties, at least 0.1 %, a remark
 * `geometry-disagrees` is added.  base [in, out]; remarks [in, out]. */
void an_specimen_merge(an_specimen *base, const an_specimen *over, an_remark_list *remarks);

/* an_specimen_check: the kind is known, and every dimension it needs is there, positive and plausible (1 um
 * .. 2 m). Returns AN_OK or AN_E_VALUE naming the dimension, what was got and what is allowed. */
an_status an_specimen_check(const an_specimen *specimen, an_error *err);

#endif
