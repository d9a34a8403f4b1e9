/* anelast/fit_parts.h: parts that master and material documents share: a shift law and a Maxwell spectrum as
 * elements. Their schema types stand in schema/fit.xsd.
 */
#ifndef ANELAST_FIT_PARTS_H
#define ANELAST_FIT_PARTS_H

#include "anelast/law.h"
#include "anelast/maxwell.h"
#include "anelast/xml.h"

/* an_law_write: the element <law kind= log_base="10"> with reference temperature, constants with their
 * standard uncertainties, covariance and valid range; nothing for a law of kind AN_LAW_NONE. */
void an_law_write(an_xml_writer *writer, const an_law *law);

/* an_law_read: the same back from a node `law` (NULL: there is none, kind AN_LAW_NONE). Constants are taken
 * by name and converted to SI; a law that fails an_law_check is refused with the node's place.
 * Returns AN_OK, AN_E_DOCUMENT, AN_E_UNIT or AN_E_VALUE. */
an_status an_law_read(const an_xml_node *node, an_law *law, an_error *err);

/* What may be known of modes beyond time and modulus; every member may be NULL. */
typedef struct an_mode_marks {
    const double *u_modulus_Pa; /* [n_mode] standard uncertainty, Pa */
    const int *trusted;         /* [n_mode] nonzero inside the trusted window */
} an_mode_marks;

/* an_maxwell_write: <instantaneous_modulus>, <long_term_modulus> and one <mode> each, with its relative
 * weight to the instantaneous modulus, into the element that is open.
 *   marks  [in] NULL where nothing more is known
 *   u_long_term_Pa [in] standard uncertainty of the long-term modulus, Pa; NAN where not known */
void an_maxwell_write(an_xml_writer *writer, const an_maxwell *model, const an_mode_marks *marks,
                      double u_long_term_Pa);

/* an_maxwell_read: the same back from the node that holds them; a mode without modulus is taken as its weight
 * times the instantaneous modulus. Content is not judged here: an_maxwell_check does that.
 *   model              [out] initialised
 *   instantaneous_Pa   [out] as the document says it, Pa
 * Returns AN_OK, AN_E_DOCUMENT, AN_E_UNIT, AN_E_VALUE (a mode whose modulus and weight disagree by more than
 * 1e-6 of the instantaneous modulus), AN_E_MEMORY. */
an_status an_maxwell_read(const an_xml_node *node, an_maxwell *model, double *instantaneous_Pa,
                          an_error *err);

/* an_numbers_write, an_numbers_read: n numbers as text content, parted by blanks.
 * Reading returns AN_OK; AN_E_VALUE where they are not exactly n numbers.
 * an_numbers_fit: whether the node's text is long enough to hold n numbers at all; asked before room for n is
 * claimed, so that a hostile document cannot make a matrix of what it does not hold. */
void an_numbers_write(an_xml_writer *writer, const double *value, size_t n);
bool an_numbers_fit(const an_xml_node *node, size_t n);
an_status an_numbers_read(const an_xml_node *node, double *value, size_t n, an_error *err);

#endif
