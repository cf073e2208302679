/* foundleft/base.h - what every stage stands on: status and place of an error, memory with one owner,
 * text, decimals as typed, units, dates, checked files.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Conventions of the whole program
 *   - A function that can fail returns fl_status and takes `fl_error *err` last. 0 is fine; a positive status is
 *     a result with a warning; a negative one means no result, outputs are then untouched or empty.
 *   - `err` may be NULL. The first error written wins; later ones are ignored.
 *   - Inside the program values are SI (Pa, m, s, Pa.s, m2/s, kg/m3, A); temperatures are degrees Celsius because
 *     every oil table uses them. A name carries its unit where doubt could arise. Conversion happens at the edges.
 *   - `_new`/`_free` own; everything else borrows unless its docstring says otherwise.
 *   - No function reads the clock, the environment or the locale; only src/cli does.
 */
#ifndef FOUNDLEFT_BASE_H
#define FOUNDLEFT_BASE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#define FL_MUST_USE __attribute__((warn_unused_result))
#define FL_PRINTF(fmt, args) __attribute__((format(printf, fmt, args)))

/* ---- status ------------------------------------------------------------------------------------------------ */

/* The one list of outcomes: name, value, sentence. Negative: no result. Positive: a result with a warning that
 * must reach the reader. The exit codes of the command line are derived from these in src/cli (see the manual). */
#define FL_STATUS_LIST(X)                                                                   \
	X(FL_OK, 0, "fine")                                                                     \
	X(FL_WARNING, 1, "done, with a warning")                                                \
	X(FL_ASK, 2, "the value is ambiguous and has to be asked")                              \
	X(FL_E_MEMORY, -1, "out of memory")                                                     \
	X(FL_E_USAGE, -2, "the command was used wrongly")                                       \
	X(FL_E_IO, -3, "reading or writing failed")                                             \
	X(FL_E_DISK_FULL, -4, "the disk is full")                                               \
	X(FL_E_READ_ONLY, -5, "the place is read-only or not permitted")                        \
	X(FL_E_NOT_FOUND, -6, "not found")                                                      \
	X(FL_E_EXISTS, -7, "exists already")                                                    \
	X(FL_E_SYNTAX, -8, "the text is not well formed")                                       \
	X(FL_E_VALUE, -9, "the value makes no sense here")                                      \
	X(FL_E_RANGE, -10, "the value is outside what is possible")                             \
	X(FL_E_STATE, -11, "not possible at this step")                                         \
	X(FL_E_TAMPERED, -12, "the digest chain does not fit: the file was changed or damaged") \
	X(FL_E_NUMERIC, -13, "the numbers do not determine a result")                           \
	X(FL_E_INTERNAL, -14, "a fault of the program itself")

typedef enum fl_status {
#define FL_STATUS_ENUM(name, value, sentence) name = (value),
	FL_STATUS_LIST(FL_STATUS_ENUM)
#undef FL_STATUS_ENUM
} fl_status;

/* The sentence of a status; never NULL. */
const char *fl_status_text(fl_status status);

/* An error with its place. Zero-initialise before use: `fl_error err = {0};`. */
typedef struct fl_error {
	fl_status status;  /* FL_OK while nothing went wrong */
	char file[256];    /* file name, "" if none */
	int line;          /* 1-based, 0 if none */
	int column;        /* 1-based, 0 if none */
	char field[96];    /* path of the field, such as "oils[2].k", or the step; "" if none */
	char message[512]; /* what is wrong and what would be right, one line, no full stop needed */
} fl_error;

/* Where something stands in a file that people edit. Borrowed strings. */
typedef struct fl_place {
	const char *file;  /* NULL if none */
	int line;          /* 1-based, 0 if none */
	int column;        /* 1-based, 0 if none */
	const char *field; /* NULL if none */
} fl_place;

/* Records the first error in `err` (if not NULL and still FL_OK) and returns `status`. */
fl_status fl_fail(fl_error *err, fl_status status, const char *format, ...) FL_PRINTF(3, 4);
fl_status fl_fail_at(fl_error *err, fl_status status, fl_place place, const char *format, ...) FL_PRINTF(4, 5);

/* Writes "file:line:column: field: message" (parts that are absent are left out) into out[size], always
 * terminated, control characters replaced. Returns out. */
char *fl_error_line(const fl_error *err, char *out, size_t size);

/* ---- memory with one owner --------------------------------------------------------------------------------- */

/* An arena: everything allocated from it lives until fl_arena_free. Zero-initialise before use. Not shared. */
typedef struct fl_arena {
	struct fl_arena_block *head; /* private */
} fl_arena;

/* `count` zeroed elements of `size` bytes aligned for any type; NULL when memory is out (count*size checked). */
void *fl_arena_alloc(fl_arena *arena, size_t count, size_t size) FL_MUST_USE;
/* Copies of text; NULL when memory is out. */
char *fl_arena_strdup(fl_arena *arena, const char *text) FL_MUST_USE;
char *fl_arena_strndup(fl_arena *arena, const char *text, size_t length) FL_MUST_USE;
/* The texts that follow, up to the NULL behind the last, one behind the other: many times faster than formatting. */
char *fl_arena_join(fl_arena *arena, ...) __attribute__((sentinel)) FL_MUST_USE;
char *fl_arena_printf(fl_arena *arena, const char *format, ...) FL_PRINTF(2, 3) FL_MUST_USE;
/* Empties the arena but keeps one block, for work that goes round and round. */
void fl_arena_reset(fl_arena *arena);
/* Frees all of it and leaves the arena empty and usable. */
void fl_arena_free(fl_arena *arena);

/* Grows an arena array by doubling: returns `items` or a larger copy with room for count+1 elements of `size`
 * bytes, updating *capacity; NULL when memory is out (the old array stays valid). */
void *fl_arena_grow(fl_arena *arena, void *items, size_t count, size_t *capacity, size_t size) FL_MUST_USE;

/* A text that grows. Appending after memory ran out does nothing and `failed` stays set, so a caller checks once.
 * Zero-initialise before use; `data` is terminated whenever it is not NULL. */
typedef struct fl_text {
	char *data; /* NULL while empty */
	size_t length;
	size_t capacity;
	bool failed;
} fl_text;

void fl_text_append(fl_text *text, const char *bytes, size_t length);
void fl_text_add(fl_text *text, const char *string);
void fl_text_printf(fl_text *text, const char *format, ...) FL_PRINTF(2, 3);
/* Pads with spaces until the current line (from the last newline) is `column` display columns wide. */
void fl_text_pad_to(fl_text *text, int column);
void fl_text_clear(fl_text *text); /* empties, keeps the memory */
void fl_text_free(fl_text *text);

/* ---- UTF-8 ------------------------------------------------------------------------------------------------- */

/* True if bytes[length] is well-formed UTF-8 (no surrogates, no overlong forms, at most U+10FFFF). */
bool fl_utf8_valid(const char *bytes, size_t length);
/* Decodes the code point at *cursor (valid UTF-8, before end) and moves *cursor behind it. */
uint32_t fl_utf8_next(const char **cursor);
/* Number of code points of a valid string, combining marks (U+0300..U+036F) not counted: columns for our texts. */
int fl_utf8_columns(const char *text);
/* True if the text has a control character (C0, DEL, C1), a line or paragraph separator (U+2028, U+2029) or a
 * bidirectional embedding, override or isolate: refused in names. */
bool fl_text_has_control(const char *text);
/* Copies `text` without leading and trailing white space (also U+00A0, U+202F) into out[size]; false if it does not
 * fit. */
bool fl_text_trim(const char *text, char *out, size_t size);

/* ---- decimals as typed ------------------------------------------------------------------------------------- */

#define FL_TYPED_SIZE 48

/* A number as a person wrote it, beside its value: the record keeps both. */
typedef struct fl_decimal {
	char typed[FL_TYPED_SIZE]; /* the digits as typed, trimmed, without the unit */
	double value;
	int decimals; /* places that show it again: digits behind the decimal mark, an exponent taken into account */
} fl_decimal;

/* Reads one decimal: optional sign (+, -, U+2212), digits with one decimal mark (comma or point), optional
 * exponent; thousands groups only where both marks appear ("1.234,5", "1,234.5").
 * `text` is the whole text (trimmed here). Returns
 *   FL_OK      *out is the value
 *   FL_ASK     one mark followed by exactly three digits, after one to three digits not starting with 0: it may be
 *              a decimal or a thousands mark. *out takes the mark as decimal, *thousands (if not NULL) the other
 *              value. The caller decides by what is possible for the field, and asks if both are.
 *   FL_E_SYNTAX / FL_E_RANGE  with a sentence: empty, nan, inf, hexadecimal, two marks, letters, overflow,
 *              longer than FL_TYPED_SIZE - 1. */
fl_status fl_decimal_parse(const char *text, fl_decimal *out, double *thousands, fl_error *err) FL_MUST_USE;

/* Writes `value` with `decimals` places, round half to even on the exact binary value, "-0.00" never: it becomes
 * "0.00". Point as decimal mark whatever the locale. "#" where it does not fit, "nan" and "inf" by name; at most 60
 * places. Returns out. */
char *fl_decimal_format(double value, int decimals, char *out, size_t size);
/* Same with a sign always ("+0.25", "-0.25", "0.00" for zero); U+2212 for the minus when `typographic`. */
char *fl_decimal_format_signed(double value, int decimals, bool typographic, char *out, size_t size);

/* ---- units ------------------------------------------------------------------------------------------------- */

typedef enum fl_quantity {
	FL_Q_NONE, /* a pure number */
	FL_Q_CURRENT,
	FL_Q_PRESSURE,
	FL_Q_TEMPERATURE,            /* inside: degrees Celsius */
	FL_Q_TEMPERATURE_DIFFERENCE, /* inside: K */
	FL_Q_KINEMATIC_VISCOSITY,    /* inside: m2/s */
	FL_Q_DYNAMIC_VISCOSITY,      /* inside: Pa.s */
	FL_Q_REDWOOD,                /* Redwood No. 1 seconds: not proportional, converted in physics */
	FL_Q_SAYBOLT,                /* Saybolt Universal seconds: not proportional, converted in physics */
	FL_Q_DENSITY,
	FL_Q_LENGTH,
	FL_Q_VOLUME_PER_REV, /* inside: m3 per revolution */
	FL_Q_ROTATION,       /* inside: revolutions per second */
	FL_Q_FREQUENCY,
	FL_Q_VOLTAGE,
	FL_Q_TIME,
	FL_Q_VOLUME,
	FL_Q_RATIO,   /* inside: fraction; % and parts are scaled */
	FL_Q_HUMIDITY /* inside: fraction relative humidity */
} fl_quantity;

/* One list of units: name of the enum, how we write it (UTF-8), quantity, factor and offset to the inside unit
 * (inside = factor * value + offset). Other accepted spellings stand in src/base/unit.c. */
#define FL_UNIT_LIST(X)                                                                \
	X(FL_U_NONE, "", FL_Q_NONE, 1.0, 0.0)                                              \
	X(FL_U_MA, "mA", FL_Q_CURRENT, 1e-3, 0.0)                                          \
	X(FL_U_BAR, "bar", FL_Q_PRESSURE, 1e5, 0.0)                                        \
	X(FL_U_MBAR, "mbar", FL_Q_PRESSURE, 1e2, 0.0)                                      \
	X(FL_U_PSI, "psi", FL_Q_PRESSURE, 6894.757293168361, 0.0)                          \
	X(FL_U_KPA, "kPa", FL_Q_PRESSURE, 1e3, 0.0)                                        \
	X(FL_U_PA, "Pa", FL_Q_PRESSURE, 1.0, 0.0)                                          \
	X(FL_U_CELSIUS, "°C", FL_Q_TEMPERATURE, 1.0, 0.0)                                  \
	X(FL_U_FAHRENHEIT, "°F", FL_Q_TEMPERATURE, 0.5555555555555556, -17.77777777777778) \
	X(FL_U_KELVIN, "K", FL_Q_TEMPERATURE_DIFFERENCE, 1.0, 0.0)                         \
	X(FL_U_MM2_S, "mm²/s", FL_Q_KINEMATIC_VISCOSITY, 1e-6, 0.0)                        \
	X(FL_U_MPA_S, "mPa·s", FL_Q_DYNAMIC_VISCOSITY, 1e-3, 0.0)                          \
	X(FL_U_REDWOOD_S, "s Redwood No. 1", FL_Q_REDWOOD, 1.0, 0.0)                       \
	X(FL_U_SAYBOLT_S, "s Saybolt Universal", FL_Q_SAYBOLT, 1.0, 0.0)                   \
	X(FL_U_KG_M3, "kg/m³", FL_Q_DENSITY, 1.0, 0.0)                                     \
	X(FL_U_MM, "mm", FL_Q_LENGTH, 1e-3, 0.0)                                           \
	X(FL_U_M, "m", FL_Q_LENGTH, 1.0, 0.0)                                              \
	X(FL_U_CM3_REV, "cm³/rev", FL_Q_VOLUME_PER_REV, 1e-6, 0.0)                         \
	X(FL_U_CM3, "cm³", FL_Q_VOLUME, 1e-6, 0.0)                                         \
	X(FL_U_R_MIN, "r/min", FL_Q_ROTATION, 0.016666666666666666, 0.0)                   \
	X(FL_U_HZ, "Hz", FL_Q_FREQUENCY, 1.0, 0.0)                                         \
	X(FL_U_V, "V", FL_Q_VOLTAGE, 1.0, 0.0)                                             \
	X(FL_U_S, "s", FL_Q_TIME, 1.0, 0.0)                                                \
	X(FL_U_MIN, "min", FL_Q_TIME, 60.0, 0.0)                                           \
	X(FL_U_PERCENT, "%", FL_Q_RATIO, 1e-2, 0.0)                                        \
	X(FL_U_PERCENT_SPAN, "% of span", FL_Q_RATIO, 1e-2, 0.0)                           \
	X(FL_U_PERCENT_READING, "% of reading", FL_Q_RATIO, 1e-2, 0.0)                     \
	X(FL_U_PERCENT_RH, "%rh", FL_Q_HUMIDITY, 1e-2, 0.0)

typedef enum fl_unit {
#define FL_UNIT_ENUM(name, text, quantity, factor, offset) name,
	FL_UNIT_LIST(FL_UNIT_ENUM)
#undef FL_UNIT_ENUM
	    FL_UNIT_COUNT
} fl_unit;

const char *fl_unit_text(fl_unit unit);
fl_quantity fl_unit_quantity(fl_unit unit);
/* Value in `unit` to the inside unit and back. */
double fl_to_inside(double value, fl_unit unit);
double fl_from_inside(double inside, fl_unit unit);
/* Finds a unit by any accepted spelling (case matters only where it must: "mPa" is not "MPa"; "cSt", "cP",
 * "mm2/s", "degC", "rpm", "mPas" are accepted). FL_E_VALUE names the near ones of the expected quantity. */
fl_status fl_unit_parse(const char *text, fl_unit *out, fl_error *err) FL_MUST_USE;

/* "10.42 mA", "0,52bar", "7.6 psi", "12": splits number and unit. Without a unit *unit is set to `fallback`.
 * Statuses as fl_decimal_parse and fl_unit_parse. */
fl_status fl_amount_parse(const char *text, fl_unit fallback, fl_decimal *number, fl_unit *unit, double *thousands,
                          fl_error *err) FL_MUST_USE;

/* ---- time -------------------------------------------------------------------------------------------------- */

/* Seconds since 1970-01-01T00:00:00Z, leap seconds ignored. */
typedef int64_t fl_utc;
/* Days since 1970-01-01; FL_NO_DAY where a date is absent. */
typedef int32_t fl_day;
#define FL_NO_DAY INT32_MIN

#define FL_UTC_SIZE 24
#define FL_DAY_SIZE 12
/* "2026-04-14T08:00:12Z". Returns out. */
char *fl_utc_format(fl_utc utc, char out[FL_UTC_SIZE]);
fl_status fl_utc_parse(const char *text, fl_utc *out, fl_error *err) FL_MUST_USE;
/* "2026-04-14"; FL_NO_DAY gives "-". Returns out. */
char *fl_day_format(fl_day day, char out[FL_DAY_SIZE]);
/* ISO dates only (others are ambiguous and the sentence says so); real calendar days, years 1900 to 2200. */
fl_status fl_day_parse(const char *text, fl_day *out, fl_error *err) FL_MUST_USE;
fl_day fl_day_of(fl_utc utc);
fl_day fl_day_from_civil(int year, int month, int day_of_month);
void fl_day_to_civil(fl_day day, int *year, int *month, int *day_of_month);

/* ---- checked files ----------------------------------------------------------------------------------------- */

/* The calls that may fail, as a table so that tests can make the n-th one fail. Semantics and errno of POSIX. */
typedef struct fl_io {
	int (*open)(void *self, const char *path, int flags, unsigned mode);
	long (*read)(void *self, int fd, void *bytes, size_t size);
	long (*write)(void *self, int fd, const void *bytes, size_t size);
	int (*sync)(void *self, int fd);
	int (*close)(void *self, int fd);
	int (*truncate)(void *self, int fd, int64_t length);
	int (*rename)(void *self, const char *from, const char *to);
	int (*rename_new)(void *self, const char *from, const char *to); /* EEXIST where `to` exists, in one step */
	int (*unlink)(void *self, const char *path);
	int (*make_folder)(void *self, const char *path, unsigned mode);
	int (*lock)(void *self, int fd); /* exclusive, without waiting */
	int64_t (*size)(void *self, int fd);
	void *self;
} fl_io;

/* The system's calls. */
const fl_io *fl_io_system(void);

/* Turns errno of a failed call into a status and a sentence that names the path and what to do. */
fl_status fl_io_fail(fl_error *err, const char *doing, const char *path, int error_number);

/* Reads a whole file of at most `limit` bytes into arena memory, one zero byte behind it. */
fl_status fl_file_read(const fl_io *io, const char *path, size_t limit, fl_arena *arena, char **bytes, size_t *length,
                       fl_error *err) FL_MUST_USE;
/* Writes beside, syncs, renames over, syncs the folder: afterwards the path holds either all the bytes or what it
 * held before. `replace` false refuses an existing path with FL_E_EXISTS. */
fl_status fl_file_write(const fl_io *io, const char *path, const void *bytes, size_t length, bool replace,
                        fl_error *err) FL_MUST_USE;
/* Creates a folder and those above it (mode 0700); existing ones are fine. */
fl_status fl_folder_make(const fl_io *io, const char *path, fl_error *err) FL_MUST_USE;

/* A file that only grows. Each fl_append_line is on disk when it returns FL_OK. After a failed write the file is
 * cut back to its last good length where possible, and the handle refuses everything until it is opened again. */
typedef struct fl_append {
	const fl_io *io;
	int fd;
	int64_t length; /* bytes known to be good */
	bool broken;
	char path[512];
} fl_append;

/* Opens for appending with an exclusive lock. `create` makes a new file (FL_E_EXISTS if there is one). `keep` is
 * the length up to which the file is good (ignored with `create`): what stands behind it is cut off. A negative
 * `keep` leaves all of it: the way to read and check the file under its lock and then call fl_append_cut, so that
 * what another program wrote in between is never cut. FL_E_STATE when another program has it open. */
fl_status fl_append_open(fl_append *append, const fl_io *io, const char *path, bool create, int64_t keep,
                         fl_error *err) FL_MUST_USE;
/* Cuts the file back to `length`, the end of what was found good; FL_E_STATE if the file is shorter than that. */
fl_status fl_append_cut(fl_append *append, int64_t length, fl_error *err) FL_MUST_USE;
fl_status fl_append_bytes(fl_append *append, const char *bytes, size_t length, fl_error *err) FL_MUST_USE;
/* Closes and lets the lock go; a handle that is all zero or closed already is fine. */
void fl_append_close(fl_append *append);

#endif
