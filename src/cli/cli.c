/* cli.c - the table of commands, options, help, exit codes.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli.h"

#include <getopt.h>
#include <stdlib.h>
#include <string.h>
#include <sys/ioctl.h>
#include <time.h>
#include <unistd.h>

#define BIT(option) (UINT64_C(1) << (option))
#define PLACES (BIT(FL_OPT_HOME) | BIT(FL_OPT_STOCK))
#define ISSUE                                                                                 \
	(BIT(FL_OPT_NUMBER) | BIT(FL_OPT_DATE) | BIT(FL_OPT_AUTHORISED_BY) | BIT(FL_OPT_ISSUER) | \
	 BIT(FL_OPT_ISSUER_ADDRESS) | BIT(FL_OPT_OUT) | BIT(FL_OPT_TEXT) | BIT(FL_OPT_AMENDS) | BIT(FL_OPT_REASON))
#define SIGN (BIT(FL_OPT_SIGNER) | BIT(FL_OPT_AS) | BIT(FL_OPT_PASSPHRASE_FD))
#define KEY                                                                                               \
	(BIT(FL_OPT_PASSPHRASE_FD) | BIT(FL_OPT_PERSON) | BIT(FL_OPT_ORGANISATION) | BIT(FL_OPT_ROLE_TITLE) | \
	 BIT(FL_OPT_RSA) | BIT(FL_OPT_SELF_SIGNED) | BIT(FL_OPT_DAYS) | BIT(FL_OPT_REQUEST))

/* One line a command: adding one is one line here, its page in foundleft.1 and its word in completion.bash. */
static const fl_command COMMANDS[] = {
    {"begin", "", "begin a session: guided entry, step by step",
     "Asks for what the procedure needs, checks each answer and writes it to the session's journal at once. Type ? at "
     "any question for help, stop to leave: nothing entered is lost, and resume goes on.",
     0, 0, PLACES | BIT(FL_OPT_PROCEDURE) | BIT(FL_OPT_INSTRUMENT) | BIT(FL_OPT_JOURNAL), fl_command_begin},
    {"resume", "[JOURNAL]", "go on with an open session",
     "Without a name the only open session is taken; if there are several they are listed.", 0, 1, PLACES,
     fl_command_resume},
    {"replay", "ANSWERS", "build a session from a file of answers",
     "The file holds the lines that would be typed; # begins a comment. Lines that begin with ! direct the replay: "
     "!procedure ID, !instrument TAG, !day DATE, !clock TIME, !pace SECONDS, !wait SECONDS, !empty. The first answer "
     "that "
     "is refused ends the replay; what was committed stays.",
     1, 1, PLACES | BIT(FL_OPT_JOURNAL), fl_command_replay},
    {"import", "CSV", "build a session from a CSV of readings",
     "Columns: session, date, kind, cycle, direction, reading, oil, lot, bath_C, line_bar_g and output_mA, output_bar "
     "or "
     "output_psi by the instrument's signal (others are ignored).",
     1, 1,
     PLACES | BIT(FL_OPT_PROCEDURE) | BIT(FL_OPT_INSTRUMENT) | BIT(FL_OPT_JOURNAL) | BIT(FL_OPT_AS_FOUND) |
         BIT(FL_OPT_AS_LEFT) | BIT(FL_OPT_PERFORMED_BY) | BIT(FL_OPT_REASON),
     fl_command_import},
    {"assess", "JOURNAL", "compute errors, linearity, hysteresis, uncertainty, decision",
     "Prints tables and the error picture, or one JSON object with --json.", 1, 1,
     BIT(FL_OPT_HOME) | BIT(FL_OPT_JSON) | BIT(FL_OPT_WHY) | BIT(FL_OPT_WIDTH) | BIT(FL_OPT_STRICT) |
         BIT(FL_OPT_BUDGET) | BIT(FL_OPT_EXPLAIN) | BIT(FL_OPT_TRIALS) | BIT(FL_OPT_SEED) | BIT(FL_OPT_THREADS),
     fl_command_assess},
    {"certify", "JOURNAL", "issue the certificate as PDF/A, signed with --signer",
     "The issue is an entry of the journal; the same number gives the same bytes again. A certificate that exists is "
     "never overwritten, only added to by signatures. Another certificate of the same session must say with --amends "
     "and --reason which one it replaces and why.",
     1, 1, PLACES | ISSUE | SIGN, fl_command_certify},
    {"countersign", "CERTIFICATE", "add a second person's signature to a certificate",
     "Another person than the performer, by name and by certificate; the first signature stays valid. The journal is "
     "looked for beside the certificate and among the sessions.",
     1, 1, BIT(FL_OPT_HOME) | BIT(FL_OPT_JOURNAL) | SIGN, fl_command_countersign},
    {"keys", "make|take|import|list|show [ID] [FILE]", "make and keep the keys that people sign with",
     "make ID: a new key, with --request for an authority or --self-signed. take ID FILE: the certificate that the "
     "authority issued. import ID FILE: key and certificate out of a PKCS#12 file. show ID: the certificate, to hand "
     "on. "
     "Keys are encrypted under a passphrase, which is asked for on the terminal.",
     1, 3, BIT(FL_OPT_HOME) | KEY, fl_command_keys},
    {"check", "FILE...", "verify certificates, journals with their seals, stock files, procedures",
     "Says of each file what it is, who vouches for it and whether every byte fits: a line for each thing checked, and "
     "a verdict.",
     1, 1000, BIT(FL_OPT_HOME) | BIT(FL_OPT_JOURNAL), fl_command_check},
    {"history", "TAG [SERIAL]", "the years of one instrument: sessions, drift, forecast, intervals",
     "Reads the record book. Drift is chained (as-found minus the as-left before), so that adjustments do not hide it; "
     "fewer than three intervals give no line. --follow chooses what the picture shows.",
     1, 2, BIT(FL_OPT_HOME) | BIT(FL_OPT_JSON) | BIT(FL_OPT_WIDTH) | BIT(FL_OPT_FOLLOW) | BIT(FL_OPT_FLEET),
     fl_command_history},
    {"due", "", "what is due for calibration, soonest first",
     "Counted from the day of the calibration, by the interval that the instrument's stock states; the month's "
     "last day where it has no such day.",
     0, 0, BIT(FL_OPT_HOME) | BIT(FL_OPT_JSON) | BIT(FL_OPT_WIDTH) | BIT(FL_OPT_ON), fl_command_due},
    {"lookback", "TAG [SERIAL]", "an instrument was found out of tolerance: since when, and what it did",
     "A report to be signed with a disposition: the days between which the limit was crossed, the true viscosity that "
     "the engine got, the records affected.",
     1, 2, BIT(FL_OPT_HOME) | BIT(FL_OPT_JSON) | BIT(FL_OPT_WIDTH) | BIT(FL_OPT_RECORD), fl_command_lookback},
    {"book", "WORD [ARGUMENT...]", "the record book: put in, check, copy, bundle, export, trace",
     "found NAME begins one. add JOURNAL... puts closed sessions in, each once. check verifies all and recomputes "
     "every result. backup FILE copies it while in use. restore FILE makes it anew from a backup; needs --prefix. "
     "export csv or json writes every record. bundle FILE writes the ship's records for an office, take FILE "
     "takes them in. trace LOT-OR-ID lists what a lot or measuring equipment fed. numbers lists those given out "
     "and never used.",
     1, 10001,
     BIT(FL_OPT_HOME) | BIT(FL_OPT_PREFIX) | BIT(FL_OPT_SINCE) | BIT(FL_OPT_UNTIL) | BIT(FL_OPT_ACCEPT) |
         BIT(FL_OPT_OUT),
     fl_command_book},
    {"stock", "WORD [ARGUMENT...]", "oils, measuring equipment, instruments: add, renew, list, check",
     "add oil, add equipment or add instrument asks for a new one; renew LOT-OR-ID-OR-TAG asks for its next "
     "certificate, "
     "the old one stays for the sessions of its days. replay FILE takes the answers from a file (!add, !renew, "
     "!empty). "
     "list says until when each may be used, check reads all files. import FILE... and export DIR take stock files in "
     "and write them out. health LOT tells an oil that is off from drift, by all readings in the record book.",
     1, 1001, PLACES | BIT(FL_OPT_SOON) | BIT(FL_OPT_ON) | BIT(FL_OPT_STRICT), fl_command_stock},
    {"report", "TAG [SERIAL]", "the trend report of one instrument as PDF/A",
     "Every session, charts of the deciding point, drift, forecast, proposed intervals, look-back. The same book and "
     "date "
     "give the same bytes. Written to HOME/reports unless --out says where; never over other content.",
     1, 2,
     PLACES | BIT(FL_OPT_OUT) | BIT(FL_OPT_DATE) | BIT(FL_OPT_FLEET) | BIT(FL_OPT_TEXT) | BIT(FL_OPT_ISSUER) |
         BIT(FL_OPT_ISSUER_ADDRESS),
     fl_command_report},
    {"pack", "SHIP|all", "the survey pack of a ship as one PDF/A",
     "A page of status, then the last certificate and the trend of each instrument whose site begins with SHIP, with "
     "an "
     "outline. Certificates are set again from the record; each copy names the original and its digest.",
     1, 1, PLACES | BIT(FL_OPT_OUT) | BIT(FL_OPT_DATE) | BIT(FL_OPT_ISSUER) | BIT(FL_OPT_ISSUER_ADDRESS),
     fl_command_pack},
    {"list", "[procedures|stock|sessions]", "show what there is, with due dates and open sessions", "", 0, 1, PLACES,
     fl_command_list},
};
#define COMMAND_COUNT (sizeof COMMANDS / sizeof COMMANDS[0])

static const struct {
	const char *word, *argument, *help;
} OPTIONS[FL_OPTION_COUNT] = {
#define FL_OPTION_ROW(name, word, argument, help) {word, argument, help},
    FL_OPTION_LIST(FL_OPTION_ROW)
#undef FL_OPTION_ROW
};

fl_exit fl_cli_exit_code(fl_status status) {
	switch (status) {
	case FL_OK:
	case FL_WARNING:
	case FL_ASK:
		return FL_EXIT_FINE;
	case FL_E_USAGE:
		return FL_EXIT_USAGE;
	case FL_E_SYNTAX:
	case FL_E_VALUE:
	case FL_E_RANGE:
	case FL_E_NUMERIC:
		return FL_EXIT_INPUT;
	case FL_E_NOT_FOUND:
		return FL_EXIT_NOT_FOUND;
	case FL_E_STATE:
	case FL_E_EXISTS:
		return FL_EXIT_STATE;
	case FL_E_IO:
	case FL_E_DISK_FULL:
	case FL_E_READ_ONLY:
		return FL_EXIT_IO;
	case FL_E_TAMPERED:
		return FL_EXIT_TAMPERED;
	case FL_E_MEMORY:
	case FL_E_INTERNAL:
		break;
	}
	return FL_EXIT_INTERNAL;
}

fl_utc fl_cli_now(void) {
	return (fl_utc)time(NULL);
}

int fl_cli_utc_offset_min(fl_utc utc) {
	time_t at = (time_t)utc;
	struct tm local;
	if (localtime_r(&at, &local) == NULL)
		return 0;
	return (int)(local.tm_gmtoff / 60);
}

int fl_cli_columns(const fl_cli *cli) {
	struct winsize size;
	int columns = 80;
	if (cli->terminal && ioctl(STDOUT_FILENO, TIOCGWINSZ, &size) == 0 && size.ws_col > 0)
		columns = size.ws_col;
	return columns < 60 ? 60 : columns > 100 ? 100 : columns;
}

fl_status fl_cli_width(const fl_cli *cli, int *columns, fl_error *err) {
	*columns = fl_cli_columns(cli);
	const char *text = cli->values[FL_OPT_WIDTH];
	if (text == NULL)
		return FL_OK;
	char *rest;
	long value = strtol(text, &rest, 10);
	if (rest == text || *rest || value < 60 || value > 200)
		return fl_fail(err, FL_E_USAGE, "--width takes a number of columns from 60 to 200, not `%s`", text);
	*columns = (int)value;
	return FL_OK;
}

void fl_cli_left_out(const fl_cli *cli, const fl_error *err) {
	char line[1400];
	fprintf(cli->err, "foundleft: left out: %s\n", fl_error_line(err, line, sizeof line));
}

/* ---- help -------------------------------------------------------------------------------------------------- */

static void print_overview(FILE *out) {
	fputs("foundleft calibrates marine fuel-oil viscosity sensors: guided entry, results with\n"
	      "uncertainty and decision, certificate.\n\nusage: foundleft COMMAND [OPTION...] [ARGUMENT...]\n\n",
	      out);
	for (size_t i = 0; i < COMMAND_COUNT; i++)
		fprintf(out, "  %-11s %s\n", COMMANDS[i].name, COMMANDS[i].summary);
	fputs("  help        this text, or `foundleft help COMMAND`\n  version     the program's version\n\n"
	      "A first look: foundleft list, then foundleft begin. The manual: man foundleft.\n"
	      "Hot fuel, pressure, rotating and electrical parts can injure: local rules and licensed\n"
	      "practice come first; this program only reminds.\n",
	      out);
}

static void print_command(FILE *out, const fl_command *command) {
	fprintf(out, "usage: foundleft %s%s%s%s\n\n%s\n", command->name, command->options ? " [OPTION...]" : "",
	        *command->arguments ? " " : "", command->arguments, command->summary);
	if (*command->more) {
		int column = 0; /* fold at 78 columns */
		fputc('\n', out);
		for (const char *word = command->more; *word;) {
			size_t length = strcspn(word, " ");
			if (column && column + 1 + (int)length > 78) {
				fputc('\n', out);
				column = 0;
			}
			column += fprintf(out, "%s%.*s", column ? " " : "", (int)length, word);
			word += length;
			word += strspn(word, " ");
		}
		fputc('\n', out);
	}
	fputc('\n', out);
	for (int option = 0; option < FL_OPTION_COUNT; option++) {
		if (!(command->options & BIT(option)))
			continue;
		char head[48];
		snprintf(head, sizeof head, "--%s%s%s", OPTIONS[option].word, OPTIONS[option].argument ? " " : "",
		         OPTIONS[option].argument ? OPTIONS[option].argument : "");
		fprintf(out, "  %-22s %s\n", head, OPTIONS[option].help);
	}
}

/* ---- parsing ----------------------------------------------------------------------------------------------- */

static const fl_command *find_command(const char *name) {
	for (size_t i = 0; i < COMMAND_COUNT; i++)
		if (strcmp(COMMANDS[i].name, name) == 0)
			return &COMMANDS[i];
	return NULL;
}

static fl_status parse_options(fl_cli *cli, const fl_command *command, int argc, char **argv, fl_error *err) {
	struct option longs[FL_OPTION_COUNT + 1] = {0};
	size_t count = 0;
	for (int option = 0; option < FL_OPTION_COUNT; option++)
		if (command->options & BIT(option))
			longs[count++] = (struct option){
			    OPTIONS[option].word, OPTIONS[option].argument ? required_argument : no_argument, NULL, 1000 + option};
	opterr = 0;
	optind = 1;
	for (int got; (got = getopt_long(argc, argv, "", longs, NULL)) != -1;) {
		if (got < 1000)
			return fl_fail(err, FL_E_USAGE,
			               "%s: `%s` is not an option here or lacks its argument; see foundleft help %s", command->name,
			               argv[optind - 1], command->name);
		cli->values[got - 1000] = optarg ? optarg : "";
	}
	cli->argument_count = argc - optind;
	cli->arguments = argv + optind;
	if (cli->argument_count < command->least)
		return fl_fail(err, FL_E_USAGE, "%s needs %s; see foundleft help %s", command->name, command->arguments,
		               command->name);
	if (cli->argument_count > command->most)
		return fl_fail(err, FL_E_USAGE, "%s: `%s` is one argument too many; see foundleft help %s", command->name,
		               cli->arguments[command->most], command->name);
	return FL_OK;
}

static int print_help(fl_cli *cli, int argc, char **argv) {
	if (argc < 3) {
		print_overview(cli->out);
		return FL_EXIT_FINE;
	}
	const fl_command *command = find_command(argv[2]);
	if (command == NULL) {
		fprintf(cli->err, "foundleft: there is no command `%s`; see foundleft help\n", argv[2]);
		return FL_EXIT_USAGE;
	}
	print_command(cli->out, command);
	return FL_EXIT_FINE;
}

static bool asks_for_help(int argc, char **argv) {
	for (int i = 2; i < argc; i++)
		if (strcmp(argv[i], "--help") == 0 || strcmp(argv[i], "-h") == 0)
			return true;
	return false;
}

static int run_command(fl_cli *cli, const fl_command *command, int argc, char **argv) {
	fl_error err = {0};
	fl_exit code = FL_EXIT_FINE;
	fl_status status = parse_options(cli, command, argc - 1, argv + 1, &err);
	if (status >= 0)
		status = fl_place_find(cli, &err);
	if (status >= 0)
		status = command->run(cli, &code, &err);
	if (fflush(cli->out) != 0 && status >= 0)
		status = fl_io_fail(&err, "writing to", "standard output", 0);
	if (status >= 0)
		return (int)code;
	char line[1400];
	fprintf(cli->err, "foundleft: %s\n",
	        err.status == FL_OK ? fl_status_text(status) : fl_error_line(&err, line, sizeof line));
	return (int)fl_cli_exit_code(status);
}

int fl_cli_main(int argc, char **argv) {
	fl_cli cli = {.io = fl_io_system(), .out = stdout, .err = stderr};
	cli.terminal = isatty(STDIN_FILENO) && isatty(STDOUT_FILENO);
	const char *word = argc > 1 ? argv[1] : "help";
	if (strcmp(word, "help") == 0 || strcmp(word, "--help") == 0 || strcmp(word, "-h") == 0)
		return argc > 1 ? print_help(&cli, argc, argv) : (print_overview(cli.err), FL_EXIT_USAGE);
	if (strcmp(word, "version") == 0 || strcmp(word, "--version") == 0) {
		fprintf(cli.out, "foundleft %s\n", FOUNDLEFT_VERSION);
		return FL_EXIT_FINE;
	}
	const fl_command *command = find_command(word);
	if (command == NULL) {
		fprintf(cli.err, "foundleft: there is no command `%s`; see foundleft help\n", word);
		return FL_EXIT_USAGE;
	}
	if (asks_for_help(argc, argv)) {
		print_command(cli.out, command);
		return FL_EXIT_FINE;
	}
	return run_command(&cli, command, argc, argv);
}
