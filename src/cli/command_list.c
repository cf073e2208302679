/* command_list.c - what there is: procedures, stock with its dates, sessions.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "case.h"
#include "cli.h"

static fl_status list_procedure(void *context, const fl_procedure *procedure, fl_error *err) {
	(void)err;
	fprintf(((const fl_cli *)context)->out, "  %-24s %-6s %s\n", procedure->id, procedure->version, procedure->title);
	return FL_OK;
}

static fl_status list_procedures(fl_cli *cli, fl_error *err) {
	fprintf(cli->out, "Procedures\n");
	return fl_place_each_procedure(cli, list_procedure, cli, err);
}

static const char *in_date(fl_status status) {
	return status >= 0 ? "in date" : "OUT OF DATE";
}

static void list_items(const fl_cli *cli, const fl_stock *stock, fl_day today) {
	char day[FL_DAY_SIZE];
	fprintf(cli->out, "Instruments\n");
	for (size_t i = 0; i < stock->instrument_count; i++)
		fprintf(cli->out, "  %-10s %-14s %s\n", stock->instruments[i].tag, stock->instruments[i].serial,
		        stock->instruments[i].site);
	fprintf(cli->out, "Measuring equipment\n");
	for (size_t i = 0; i < stock->equipment_count; i++) {
		const fl_equipment *item = &stock->equipment[i];
		fprintf(cli->out, "  %-10s %-20s due %-12s %s\n", item->id, fl_stock_role_text(item->role),
		        fl_day_format(item->due_on, day), in_date(fl_stock_equipment_in_date(item, today, NULL)));
	}
	fprintf(cli->out, "Reference oils\n");
	for (size_t i = 0; i < stock->oil_count; i++) {
		const fl_oil *oil = &stock->oils[i];
		fprintf(cli->out, "  %-10s lot %-16s use before %-12s %s\n", oil->name, oil->lot,
		        fl_day_format(oil->use_before, day), in_date(fl_stock_oil_in_date(oil, today, NULL)));
	}
}

static fl_status list_stock(fl_cli *cli, fl_error *err) {
	fl_stock stock = {0};
	fl_status status = fl_place_stock(cli, &stock, err);
	if (status >= 0) {
		fl_stock_keep(&stock, fl_day_of(fl_cli_now()));
		list_items(cli, &stock, fl_day_of(fl_cli_now()));
	}
	fl_stock_free(&stock);
	return status;
}

static fl_status list_sessions(fl_cli *cli, fl_error *err) {
	fl_arena arena = {0};
	char folder[FL_PATH_SIZE], **paths;
	size_t count;
	fprintf(cli->out, "Sessions\n");
	fl_status status = fl_place_join(folder, cli->home, "sessions", err);
	if (status >= 0)
		status = fl_place_files(folder, ".flj", &arena, &paths, &count, err);
	for (size_t i = 0; status >= 0 && i < count; i++) {
		fl_session session = {0};
		fl_error local = {0};
		char head[FL_DIGEST_HEX_SIZE], day[FL_DAY_SIZE];
		bool torn;
		if (fl_journal_read(cli->io, paths[i], &session, head, &torn, &local) < 0)
			fl_cli_left_out(cli, &local);
		else
			fprintf(cli->out, "  %-32s %s  %s, %zu readings\n", strrchr(paths[i], '/') + 1,
			        fl_day_format(session.day, day), session.closed ? "closed" : "OPEN", session.reading_count);
		fl_session_free(&session);
	}
	fl_arena_free(&arena);
	return status;
}

fl_status fl_command_list(fl_cli *cli, fl_exit *code, fl_error *err) {
	(void)code;
	const char *what = cli->argument_count ? cli->arguments[0] : "";
	bool known = *what == '\0';
	fl_status status = FL_OK;
	if (*what == '\0' || strcmp(what, "procedures") == 0) {
		known = true;
		status = list_procedures(cli, err);
	}
	if (status >= 0 && (*what == '\0' || strcmp(what, "stock") == 0)) {
		known = true;
		status = list_stock(cli, err);
	}
	if (status >= 0 && (*what == '\0' || strcmp(what, "sessions") == 0)) {
		known = true;
		status = list_sessions(cli, err);
	}
	return known ? status : fl_fail(err, FL_E_USAGE, "list takes procedures, stock or sessions, not `%s`", what);
}
