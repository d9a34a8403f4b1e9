/* shape.h: the one shape of all programs: option table -> library calls -> result.
 *
 * A program's main fills an an_program, calls an_program_begin, does its work through the libraries, and
 * returns an_program_end or an_program_refuse. Help, manual pages and completion come from the same table.
 *
 *     int main(int argc, char **argv)
 *     {
 *         an_arguments arguments;
 *         if (!an_program_begin(&program, argc, argv, &arguments))
 *             return arguments.exit_code;
 *         an_error err = {0};
 *         an_status status = work(&arguments, &err);
 *         return status < 0 ? an_program_refuse(&program, &err) : an_program_end(&program);
 *     }
 */
#ifndef ANELAST_SHAPE_H
#define ANELAST_SHAPE_H

#include "anelast/procedure.h"
#include "anelast/remark.h"
#include "anelast/status.h"

#include <stdbool.h>
#include <stddef.h>

/* Exit codes that all programs share; a program with more says so in its `exits`. */
enum { AN_EXIT_DONE = 0, AN_EXIT_REFUSED = 1, AN_EXIT_USAGE = 2, AN_EXIT_IO = 3 };

/* Room for what one command line may give. */
enum { AN_OPTIONS_MOST = 48, AN_GIVEN_MOST = 256 };

/* One row of the option table. */
typedef struct an_option {
    const char *name;     /* long name without dashes */
    char letter;          /* short form, or 0 */
    const char *argument; /* name of the argument ("FILE"); NULL: a switch */
    const char *unit;     /* unit of the argument, or NULL */
    const char *range;    /* what is allowed, or NULL */
    const char *standard; /* the default as text, or NULL */
    const char *help;     /* what it does, one sentence without full stop */
} an_option;

/* Shared options that a program takes. */
enum {
    AN_TAKES_OUTPUT = 1,    /* --output FILE */
    AN_TAKES_PROCEDURE = 2, /* --procedure FILE, --show-procedure */
    AN_TAKES_QUIET = 4      /* --quiet */
};

/* What a program is. */
typedef struct an_program {
    const char *name;            /* "anelast-phase" */
    const char *summary;         /* what it does, one line, "run document to complex moduli of every burst" */
    const char *operands;        /* usage text of what is no option: "[RUN]" */
    const char *const *about;    /* paragraphs of the description, ended by NULL; or NULL */
    const char *const *examples; /* command lines, ended by NULL */
    const an_option *options;    /* [n_options] its own, after the shared ones */
    size_t n_options;            /* [1] */
    unsigned takes;              /* AN_TAKES_... joined by | */
    int files_least;             /* operands at least */
    int files_most;              /* operands at most; -1: any number */
    const char *exits;           /* more exit codes in words, or NULL */
} an_program;

/* One option as it was given. */
typedef struct an_given {
    const char *name;  /* long name */
    const char *value; /* "" for a switch */
} an_given;

/* What the command line said. */
typedef struct an_arguments {
    an_given given[AN_GIVEN_MOST]; /* [n_given] in order */
    size_t n_given;                /* [1] */
    char **files;                  /* [n_files] operands, in argv */
    int n_files;                   /* [1] */
    const char *output;            /* --output; "-" where not given */
    bool quiet;                    /* --quiet */
    an_procedure procedure;        /* in force, where the program takes one */
    int exit_code;                 /* what main returns where an_program_begin says false */
} an_arguments;

/* an_program_begin: parse the command line and do what every program does: --help and --version (standard
 * output, 0), wrong usage (standard error, 2), --show-procedure, reading --procedure. Returns true where the
 * program shall go on, false where main shall return arguments->exit_code. */
bool an_program_begin(const an_program *program, int argc, char **argv, an_arguments *arguments);

/* an_argument: the last value given for an option; NULL where it was not given. A switch gives "". */
const char *an_argument(const an_arguments *arguments, const char *name);

/* an_argument_number: the last value of an option as a number with unit in SI, `standard` where it was not
 * given. unit [in] SI unit wanted; "1" for a bare number Returns AN_OK, or AN_E_USAGE naming the option and
 * what is allowed. */
an_status an_argument_number(const an_arguments *arguments, const char *name, const char *unit,
                             double standard, double *value, an_error *err);

/* an_argument_file: the i-th operand, "-" where there are fewer. */
const char *an_argument_file(const an_arguments *arguments, int i_file);

/* an_program_say: "program: place: text" on standard error. place may be NULL. */
void an_program_say(const an_program *program, const char *place, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/* an_program_refuse: print an error as "program: place: text", drop what waits to go to standard
 * output. Returns the exit code of
 * its status. */
int an_program_refuse(const an_program *program, const an_error *err);

/* an_program_end: flush and check standard output. Returns 0, or 3 with a message where it could not be
 * written. */
int an_program_end(const an_program *program);

#endif
