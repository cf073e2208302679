/* talk.c - the thin blocking loop's ear: libedit where both ends are a terminal, getline otherwise.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "talk.h"

#include <histedit.h>
#include <locale.h>
#include <stdlib.h>
#include <string.h>

#include "report_parts.h"

struct fl_talk {
	fl_cli *cli;
	EditLine *edit;
	History *history;
	char prompt[256]; /* last line of the prompt, asked for by libedit */
	char *line;
	size_t capacity;
};

static char *edit_prompt(EditLine *edit) {
	fl_talk *talk = NULL;
	el_get(edit, EL_CLIENTDATA, &talk);
	return talk->prompt;
}

static void start_editing(fl_talk *talk) {
	HistEvent event;
	setlocale(LC_CTYPE, ""); /* else libedit drops what is not ASCII; nothing else here looks at the locale */
	talk->edit = el_init("foundleft", stdin, talk->cli->out, talk->cli->err);
	if (talk->edit == NULL)
		return; /* plain lines still work */
	el_set(talk->edit, EL_CLIENTDATA, talk);
	el_set(talk->edit, EL_PROMPT, edit_prompt);
	el_set(talk->edit, EL_EDITOR, "emacs");
	el_set(talk->edit, EL_SIGNAL, 1); /* an interrupt restores the terminal first */
	talk->history = history_init();
	if (talk->history != NULL) {
		history(talk->history, &event, H_SETSIZE, 200);
		el_set(talk->edit, EL_HIST, history, talk->history);
	}
}

fl_status fl_talk_new(fl_talk **out, fl_cli *cli, fl_error *err) {
	fl_talk *talk = calloc(1, sizeof *talk);
	if (talk == NULL)
		return fl_fail(err, FL_E_MEMORY, "out of memory");
	talk->cli = cli;
	if (cli->terminal)
		start_editing(talk);
	*out = talk;
	return FL_OK;
}

void fl_talk_free(fl_talk *talk) {
	if (talk == NULL)
		return;
	if (talk->history != NULL)
		history_end(talk->history);
	if (talk->edit != NULL)
		el_end(talk->edit);
	free(talk->line);
	free(talk);
}

static bool edited_line(fl_talk *talk, const char **line) {
	int count = 0;
	HistEvent event;
	const char *got = el_gets(talk->edit, &count);
	if (got == NULL || count <= 0)
		return false;
	free(talk->line);
	talk->line = strdup(got);
	if (talk->line == NULL)
		return false;
	talk->line[strcspn(talk->line, "\r\n")] = '\0';
	if (talk->history != NULL && *talk->line)
		history(talk->history, &event, H_ENTER, talk->line);
	*line = talk->line;
	return true;
}

static bool plain_line(fl_talk *talk, const char **line) {
	if (getline(&talk->line, &talk->capacity, stdin) < 0)
		return false;
	talk->line[strcspn(talk->line, "\r\n")] = '\0';
	*line = talk->line;
	return true;
}

/* Folds one line at the terminal's width; what follows is indented as far as its own indent. */
static void fold_line(fl_text *out, const char *line, size_t length, int columns) {
	char lead[32], text[4096];
	size_t indent = strspn(line, " ");
	if (indent >= sizeof lead || length - indent >= sizeof text) {
		fl_text_append(out, line, length);
		fl_text_add(out, "\n");
		return;
	}
	snprintf(lead, sizeof lead, "%.*s", (int)indent, line);
	snprintf(text, sizeof text, "%.*s", (int)(length - indent), line + indent);
	fl_report_wrap(out, lead, text, columns);
}

void fl_talk_fold(fl_text *out, const char *text, int columns) {
	for (const char *end; *text; text = end) {
		end = text + strcspn(text, "\n");
		if (fl_utf8_columns(text) > columns && end - text > columns / 2)
			fold_line(out, text, (size_t)(end - text), columns);
		else
			fl_text_append(out, text, (size_t)(end - text) + (*end == '\n'));
		end += *end == '\n';
	}
}

bool fl_talk_line(fl_talk *talk, const char *prompt, const char **line) {
	fl_text folded = {0};
	fl_talk_fold(&folded, prompt, fl_cli_columns(talk->cli));
	while (folded.length && strchr("\n ", folded.data[folded.length - 1]))
		folded.data[--folded.length] = '\0';
	fl_text_add(&folded, " ");
	const char *last = folded.data ? strrchr(folded.data, '\n') : "> ";
	last = last ? last + (*last == '\n') : folded.data;
	if (folded.data)
		fwrite(folded.data, 1, (size_t)(last - folded.data), talk->cli->out);
	snprintf(talk->prompt, sizeof talk->prompt, "%s", last);
	fl_text_free(&folded);
	if (talk->edit == NULL)
		fputs(talk->prompt, talk->cli->out);
	fflush(talk->cli->out);
	return talk->edit != NULL ? edited_line(talk, line) : plain_line(talk, line);
}
