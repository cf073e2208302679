/* cli.h - the command line: one table of commands and options, exit codes, and the only place that reads clock,
 * environment and locale.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_CLI_CLI_H
#define FOUNDLEFT_CLI_CLI_H

#include <stdio.h>

#include "foundleft/base.h"
#include "foundleft/procedure.h"
#include "foundleft/stock.h"

/* Exit codes, documented in foundleft.1; derived from the status in fl_cli_exit_code. */
typedef enum fl_exit {
	FL_EXIT_FINE = 0,
	FL_EXIT_NOT_PASS =
	    1,             /* --strict: the verdict is not "pass"; check: unchanged, but not vouched for or not complete */
	FL_EXIT_USAGE = 2, /* the command was used wrongly */
	FL_EXIT_INPUT = 3, /* a file or an answer is wrong: the line says where and what to do */
	FL_EXIT_NOT_FOUND = 4, /* a file, session, instrument or procedure is not there */
	FL_EXIT_STATE = 5,     /* not possible now: exists already, in use, closed */
	FL_EXIT_IO = 6,        /* reading or writing failed, disk full, read-only */
	FL_EXIT_TAMPERED = 7,  /* the digest chain or a signature does not fit, or something was added */
	FL_EXIT_INTERNAL = 8   /* out of memory, or a fault of the program */
} fl_exit;

#define FL_PATH_SIZE 512

/* Every option that some command takes; the table in cli.c says which takes which. */
#define FL_OPTION_LIST(X)                                                                                       \
	X(FL_OPT_HOME, "home", "DIR", "folder of stock, sessions and own procedures (FOUNDLEFT_HOME)")              \
	X(FL_OPT_STOCK, "stock", "DIR", "folder of the stock files instead of HOME/stock")                          \
	X(FL_OPT_PROCEDURE, "procedure", "ID", "procedure to follow, or the path of a template")                    \
	X(FL_OPT_INSTRUMENT, "instrument", "TAG", "instrument to calibrate")                                        \
	X(FL_OPT_JOURNAL, "journal", "FILE", "the journal, instead of one under HOME/sessions")                     \
	X(FL_OPT_AS_FOUND, "as-found", "NAME", "rows of the session column that are the as-found run")              \
	X(FL_OPT_AS_LEFT, "as-left", "NAME", "rows of the session column that are the as-left run")                 \
	X(FL_OPT_PERFORMED_BY, "performed-by", "NAME", "who took the readings")                                     \
	X(FL_OPT_REASON, "reason", "TEXT", "why it was adjusted or left alone; why a certificate is amended")       \
	X(FL_OPT_JSON, "json", NULL, "one JSON object on standard output")                                          \
	X(FL_OPT_WHY, "why", NULL, "also say why the instrument is off and what to do (opinion)")                   \
	X(FL_OPT_WIDTH, "width", "COLUMNS", "width of tables and pictures (default: the terminal's, at most 100)")  \
	X(FL_OPT_STRICT, "strict", NULL, "exit with 1 unless the last run's verdict is pass")                       \
	X(FL_OPT_BUDGET, "budget", NULL, "the uncertainty budget of every point as a table")                        \
	X(FL_OPT_EXPLAIN, "explain", "POINT", "every number of a point: an oil, a lot or zero, a direction behind") \
	X(FL_OPT_TRIALS, "trials", "N|auto", "propagate by Monte Carlo: N trials, or until two digits are stable")  \
	X(FL_OPT_SEED, "seed", "S", "of the trials (default: from the journal's digest)")                           \
	X(FL_OPT_THREADS, "threads", "T", "for the trials (default: every core); changes no digit")                 \
	X(FL_OPT_NUMBER, "number", "TEXT", "certificate number (default: the session's name)")                      \
	X(FL_OPT_DATE, "date", "YYYY-MM-DD", "date of issue (default: today)")                                      \
	X(FL_OPT_AUTHORISED_BY, "authorised-by", "NAME", "who authorises the certificate")                          \
	X(FL_OPT_ISSUER, "issuer", "TEXT", "who issues, instead of bench.yaml")                                     \
	X(FL_OPT_ISSUER_ADDRESS, "issuer-address", "TEXT", "address of the issuer, instead of bench.yaml")          \
	X(FL_OPT_OUT, "out", "FILE", "write the certificate here instead of beside the journal")                    \
	X(FL_OPT_TEXT, "text", NULL, "print the certificate's content as text, write no PDF")                       \
	X(FL_OPT_AMENDS, "amends", "NUMBER", "certificate that this one replaces; --reason says why")               \
	X(FL_OPT_SIGNER, "signer", "ID", "sign with this key; see foundleft keys")                                  \
	X(FL_OPT_AS, "as", "PART", "in which part: performed, reviewed or authorised")                              \
	X(FL_OPT_PASSPHRASE_FD, "passphrase-fd", "N", "read the passphrase from this file descriptor, a line each") \
	X(FL_OPT_PERSON, "person", "NAME", "who the key belongs to")                                                \
	X(FL_OPT_ORGANISATION, "organisation", "NAME", "the person's organisation")                                 \
	X(FL_OPT_ROLE_TITLE, "role-title", "TEXT", "the person's role in it")                                       \
	X(FL_OPT_RSA, "rsa", NULL, "an RSA key of 3072 bit instead of an elliptic one (P-256)")                     \
	X(FL_OPT_SELF_SIGNED, "self-signed", NULL, "certify the key by itself")                                     \
	X(FL_OPT_DAYS, "days", "N", "how long a self-signed certificate holds (default: 730)")                      \
	X(FL_OPT_REQUEST, "request", NULL, "print a certificate request for an authority")                          \
	X(FL_OPT_FOLLOW, "follow", "WHAT", "zero, span, stopped zero, or the oil of a point")                       \
	X(FL_OPT_FLEET, "fleet", NULL, "read all instruments too, for the reliability of the fleet")                \
	X(FL_OPT_ON, "on", "YYYY-MM-DD", "the day to count from (default: today)")                                  \
	X(FL_OPT_RECORD, "record", "NUMBER", "the record to look back from (default: the last that failed)")        \
	X(FL_OPT_PREFIX, "prefix", "LETTERS", "what the book's numbers begin with, such as QH")                     \
	X(FL_OPT_SINCE, "since", "YYYY-MM-DD", "from this day on (default: all)")                                   \
	X(FL_OPT_UNTIL, "until", "YYYY-MM-DD", "up to and with this day (default: all)")                            \
	X(FL_OPT_ACCEPT, "accept", "ORIGIN", "take in a ship never seen before, whose origin begins with this")     \
	X(FL_OPT_SOON, "soon", "DAYS", "how far ahead of a last day to warn (default: 60)")

typedef enum fl_option {
#define FL_OPTION_ENUM(name, word, argument, help) name,
	FL_OPTION_LIST(FL_OPTION_ENUM)
#undef FL_OPTION_ENUM
	    FL_OPTION_COUNT
} fl_option;

/* One run of the program. */
typedef struct fl_cli {
	const fl_io *io;
	FILE *out, *err;
	const char *values[FL_OPTION_COUNT]; /* argument of the option, "" for a flag, NULL if absent */
	int argument_count;
	char **arguments; /* what is not an option */
	char home[FL_PATH_SIZE];
	char stock[FL_PATH_SIZE];
	char data[FL_PATH_SIZE]; /* installed templates and faces */
	bool terminal;           /* standard input and output are a terminal */
} fl_cli;

typedef struct fl_command {
	const char *name;
	const char *arguments; /* "JOURNAL", "[JOURNAL]" */
	const char *summary;
	const char *more; /* a short paragraph for `help NAME` */
	int least, most;  /* arguments */
	uint64_t options; /* bits of fl_option */
	fl_status (*run)(fl_cli *cli, fl_exit *code, fl_error *err);
} fl_command;

/* Parses and runs; prints the error line; returns the exit code. */
int fl_cli_main(int argc, char **argv);
fl_exit fl_cli_exit_code(fl_status status);
fl_utc fl_cli_now(void);
/* Offset of local time from UTC at `utc`, minutes. */
int fl_cli_utc_offset_min(fl_utc utc);
int fl_cli_columns(const fl_cli *cli);
/* --width, or else fl_cli_columns. */
fl_status fl_cli_width(const fl_cli *cli, int *columns, fl_error *err) FL_MUST_USE;
/* Tells on standard error that a file was passed over, and why. */
void fl_cli_left_out(const fl_cli *cli, const fl_error *err);

/* ---- places (place.c) ---- */
fl_status fl_place_find(fl_cli *cli, fl_error *err) FL_MUST_USE;
/* A journal by path, or by the name of a session under HOME/sessions. */
fl_status fl_place_journal(const fl_cli *cli, const char *name, char path[FL_PATH_SIZE], fl_error *err) FL_MUST_USE;
/* A procedure by id (HOME/templates, then the installed ones) or by path. */
fl_status fl_place_procedure(const fl_cli *cli, const char *id, char path[FL_PATH_SIZE], fl_error *err) FL_MUST_USE;
/* A path for a new journal of this day and tag; creates the folder. */
fl_status fl_place_new_journal(const fl_cli *cli, fl_day day, const char *tag, char path[FL_PATH_SIZE],
                               fl_error *err) FL_MUST_USE;
/* Paths of files with `suffix` in a folder, sorted, in arena memory; a missing folder has none. */
fl_status fl_place_files(const char *folder, const char *suffix, fl_arena *arena, char ***paths, size_t *count,
                         fl_error *err) FL_MUST_USE;
/* All stock files of the stock folder; bench.yaml, which says who issues, is none of them. */
fl_status fl_place_stock(const fl_cli *cli, fl_stock *stock, fl_error *err) FL_MUST_USE;
/* Name and address of who issues: from the options, else from bench.yaml of the stock folder (arena memory). A file
 * without one of them is an error where it is `required`; no file leaves what the options do not say NULL. */
fl_status fl_place_issuer(const fl_cli *cli, fl_arena *arena, bool required, const char **issuer, const char **address,
                          fl_error *err) FL_MUST_USE;
/* Each procedure there is, the bench's own first; a template that does not load is named on standard error. */
typedef fl_status (*fl_procedure_visitor)(void *context, const fl_procedure *procedure, fl_error *err);
fl_status fl_place_each_procedure(const fl_cli *cli, fl_procedure_visitor visit, void *context,
                                  fl_error *err) FL_MUST_USE;
fl_status fl_place_join(char path[FL_PATH_SIZE], const char *folder, const char *name, fl_error *err) FL_MUST_USE;

/* ---- commands ---- */
fl_status fl_command_begin(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_resume(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_replay(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_import(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_assess(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_certify(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_countersign(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_keys(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_check(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_history(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_due(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_lookback(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_book(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_stock(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_report(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_pack(fl_cli *cli, fl_exit *code, fl_error *err);
fl_status fl_command_list(fl_cli *cli, fl_exit *code, fl_error *err);

#endif
