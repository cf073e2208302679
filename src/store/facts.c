/* facts.c - an entry of the book as text.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The text is what the digest of an entry covers, what bundles carry, and what can still be read when this program is
 * gone. Lines as in lines.h, always in this order; "-" where a number or day is not determined:
 *
 *   foundleft-entry  1
 *   origin    digest of the founding of its chain
 *   sequence  place in the chain, from 1
 *   previous  digest of the entry before; of the founding for the first
 *   kept      when it came into the book, UTC
 *   kind      session | paper
 *   carries   size, digest, packed size, packed digest of the bytes that it carries (SHA-256)
 *
 * then for a session
 *   number | replaces (digest, number, reason; only in an amendment) | instrument (site, tag, serial) | place
 * (position, owner) | day | closed | due (day, months, running hours) | hours | procedure | program | performed | work
 * (words) | scale (low, high, unit, set point, adjust limit) | run as-found (state, zero, u, span, u, hysteresis,
 * verdict) | point (number, oil, lot, x, error, U, k, tolerance, verdict) for each | run as-left ... | used (kind,
 * name, detail) for each lot and piece of equipment | end and for a paper record | number | stage | file | end
 *
 * Valid if and only if reading it and writing it again gives the same bytes.
 */
#include "facts.h"
#include "lines.h"

#include <string.h>

static const char *const kind_words[] = {"session", "paper"};
static const char *const state_words[] = {"none", "taken", "same"};
static const struct {
	unsigned flag;
	const char *word;
} works[] = {{FL_WORK_ADJUSTED, "adjusted"},
             {FL_WORK_CLEANED, "cleaned"},
             {FL_WORK_REPAIRED, "repaired"},
             {FL_WORK_BEFORE, "before"}};
enum { WORKS = 4 };

/* ---- writing ---------------------------------------------------------------------------------------------------- */

static void begin(fl_text *out, const char *word) {
	fl_text_add(out, word);
}

static void end(fl_text *out) {
	fl_text_append(out, "\n", 1);
}

static void line_text(fl_text *out, const char *word, const char *value) {
	begin(out, word);
	fl_put_text(out, value);
	end(out);
}

static void write_head(const fl_entry_head *head, fl_text *out) {
	fl_text_add(out, "foundleft-entry\t1\n");
	line_text(out, "origin", head->origin);
	begin(out, "sequence");
	fl_put_whole(out, head->sequence);
	end(out);
	line_text(out, "previous", head->previous);
	begin(out, "kept");
	fl_put_utc(out, head->kept_at);
	end(out);
	line_text(out, "kind", kind_words[head->kind]);
	begin(out, "carries");
	fl_put_whole(out, (int64_t)head->carried.size);
	fl_put_text(out, head->carried.digest);
	fl_put_whole(out, (int64_t)head->carried.packed_size);
	fl_put_text(out, head->carried.packed_digest);
	end(out);
}

static void write_point(const fl_kept_point *p, fl_text *out) {
	begin(out, "point");
	fl_put_whole(out, p->point);
	fl_put_text(out, p->oil);
	fl_put_text(out, p->lot);
	const double numbers[] = {p->x, p->error_span, p->U_span, p->k, p->tolerance_span};
	for (size_t i = 0; i < sizeof numbers / sizeof *numbers; i++)
		fl_put_real(out, numbers[i]);
	fl_put_text(out, p->verdict);
	end(out);
}

static void write_run(const char *name, const fl_kept_run *run, fl_text *out) {
	begin(out, "run");
	fl_put_text(out, name);
	fl_put_text(out, state_words[run->state]);
	const double numbers[] = {run->zero_span, run->zero_u_span, run->span_span, run->span_u_span, run->hysteresis_span};
	for (size_t i = 0; i < sizeof numbers / sizeof *numbers; i++)
		fl_put_real(out, numbers[i]);
	fl_put_text(out, run->verdict);
	end(out);
	for (size_t i = 0; i < run->point_count; i++)
		write_point(&run->points[i], out);
}

static void write_times(const fl_record *r, fl_text *out) {
	begin(out, "day");
	fl_put_day(out, r->day);
	end(out);
	begin(out, "closed");
	fl_put_utc(out, r->closed_at);
	end(out);
	begin(out, "due");
	fl_put_day(out, r->due);
	fl_put_whole(out, r->interval_months);
	fl_put_real(out, r->due_hours);
	end(out);
	begin(out, "hours");
	fl_put_real(out, r->running_hours);
	end(out);
}

static void write_work(unsigned work, fl_text *out) {
	begin(out, "work");
	for (int i = 0; i < WORKS; i++)
		if (work & works[i].flag)
			fl_put_text(out, works[i].word);
	end(out);
}

static void write_names(const fl_record *r, fl_text *out) {
	line_text(out, "number", r->number);
	if (*r->replaces) {
		begin(out, "replaces");
		fl_put_text(out, r->replaces);
		fl_put_text(out, r->replaces_number);
		fl_put_text(out, r->reason);
		end(out);
	}
	begin(out, "instrument");
	fl_put_text(out, r->site);
	fl_put_text(out, r->tag);
	fl_put_text(out, r->serial);
	end(out);
	begin(out, "place");
	fl_put_text(out, r->position);
	fl_put_text(out, r->owner);
	end(out);
}

static void write_scale(const fl_record *r, fl_text *out) {
	begin(out, "scale");
	fl_put_real(out, r->scale_low);
	fl_put_real(out, r->scale_high);
	fl_put_text(out, r->dial_unit);
	fl_put_real(out, r->set_point);
	fl_put_real(out, r->adjust_limit_span);
	end(out);
}

static bool can_put_points(const fl_kept_run *run) {
	for (size_t i = 0; i < run->point_count; i++)
		if (!fl_can_put(run->points[i].oil) || !fl_can_put(run->points[i].lot) || !fl_can_put(run->points[i].verdict))
			return false;
	return fl_can_put(run->verdict);
}

static bool can_put_record(const fl_record *r) {
	const char *const all[] = {r->number,  r->replaces,  r->replaces_number, r->reason, r->site,
	                           r->tag,     r->serial,    r->position,        r->owner,  r->procedure,
	                           r->program, r->dial_unit, r->performed_by};
	for (size_t i = 0; i < sizeof all / sizeof *all; i++)
		if (!fl_can_put(all[i]))
			return false;
	for (size_t i = 0; i < r->item_count; i++)
		if (!fl_can_put(r->items[i].kind) || !fl_can_put(r->items[i].name) || !fl_can_put(r->items[i].detail))
			return false;
	return can_put_points(&r->as_found) && can_put_points(&r->as_left);
}

static fl_status finish(fl_text *out, fl_error *err) {
	fl_text_add(out, "end\n");
	if (out->failed)
		return fl_fail(err, FL_E_MEMORY, "out of memory for an entry of the book");
	if (out->length > FACTS_LIMIT)
		return fl_fail(err, FL_E_RANGE, "the entry has %zu bytes; the book takes at most %zu", out->length,
		               FACTS_LIMIT);
	return FL_OK;
}

static fl_status bad_text(fl_error *err) {
	return fl_fail(err, FL_E_VALUE, "a text has control characters or is not UTF-8: write it anew");
}

fl_status fl_facts_write_record(const fl_entry_head *head, const fl_record *r, fl_text *out, fl_error *err) {
	if (!can_put_record(r))
		return bad_text(err);
	write_head(head, out);
	write_names(r, out);
	write_times(r, out);
	line_text(out, "procedure", r->procedure);
	line_text(out, "program", r->program);
	line_text(out, "performed", r->performed_by);
	write_work(r->work, out);
	write_scale(r, out);
	write_run("as-found", &r->as_found, out);
	write_run("as-left", &r->as_left, out);
	for (size_t i = 0; i < r->item_count; i++) {
		begin(out, "used");
		fl_put_text(out, r->items[i].kind);
		fl_put_text(out, r->items[i].name);
		fl_put_text(out, r->items[i].detail);
		end(out);
	}
	return finish(out, err);
}

fl_status fl_facts_write_paper(const fl_entry_head *head, const fl_paper *paper, fl_text *out, fl_error *err) {
	if (!fl_can_put(paper->number) || !fl_can_put(paper->stage) || !fl_can_put(paper->file))
		return bad_text(err);
	write_head(head, out);
	line_text(out, "record", paper->record);
	line_text(out, "number", paper->number);
	line_text(out, "stage", paper->stage);
	line_text(out, "file", paper->file);
	return finish(out, err);
}

/* ---- reading ---------------------------------------------------------------------------------------------------- */

static int word_index(fl_lines *lines, int value, const char *const *words, int count) {
	const char *word = fl_lines_text(lines, value);
	for (int i = 0; i < count; i++)
		if (strcmp(word, words[i]) == 0)
			return i;
	fl_lines_fail(lines, "an unknown word");
	return 0;
}

static void read_head(fl_lines *lines, fl_entry_head *head) {
	if (fl_lines_take(lines, "foundleft-entry", 1) && fl_lines_whole(lines, 0) != 1)
		fl_lines_fail(lines, "written by a later program: update this one");
	if (fl_lines_take(lines, "origin", 1))
		fl_lines_digest(lines, 0, head->origin);
	if (fl_lines_take(lines, "sequence", 1))
		head->sequence = fl_lines_whole(lines, 0);
	if (fl_lines_take(lines, "previous", 1))
		fl_lines_digest(lines, 0, head->previous);
	if (fl_lines_take(lines, "kept", 1))
		head->kept_at = fl_lines_utc(lines, 0);
	if (fl_lines_take(lines, "kind", 1))
		head->kind = (fl_entry_kind)word_index(lines, 0, kind_words, 2);
	if (!fl_lines_take(lines, "carries", 4))
		return;
	head->carried.size = (uint64_t)fl_lines_whole(lines, 0);
	fl_lines_digest(lines, 1, head->carried.digest);
	head->carried.packed_size = (uint64_t)fl_lines_whole(lines, 2);
	fl_lines_digest(lines, 3, head->carried.packed_digest);
	if (head->carried.size > CARRIED_LIMIT || head->carried.packed_size > CARRIED_LIMIT + 1024 * 1024)
		fl_lines_fail(lines, "larger than the book takes");
}

static const char *take_text(fl_lines *lines, const char *word) {
	return fl_lines_take(lines, word, 1) ? fl_lines_text(lines, 0) : "";
}

static void read_names(fl_lines *lines, fl_record *r) {
	r->number = take_text(lines, "number");
	r->replaces = r->replaces_number = r->reason = r->site = r->tag = r->serial = r->position = r->owner = "";
	if (fl_lines_next_is(lines, "replaces") && fl_lines_take(lines, "replaces", 3)) {
		char digest[FL_DIGEST_HEX_SIZE];
		fl_lines_digest(lines, 0, digest);
		r->replaces = fl_lines_text(lines, 0);
		r->replaces_number = fl_lines_text(lines, 1);
		r->reason = fl_lines_text(lines, 2);
	}
	if (fl_lines_take(lines, "instrument", 3)) {
		r->site = fl_lines_text(lines, 0);
		r->tag = fl_lines_text(lines, 1);
		r->serial = fl_lines_text(lines, 2);
	}
	if (fl_lines_take(lines, "place", 2)) {
		r->position = fl_lines_text(lines, 0);
		r->owner = fl_lines_text(lines, 1);
	}
}

static void read_times(fl_lines *lines, fl_record *r) {
	if (fl_lines_take(lines, "day", 1))
		r->day = fl_lines_day(lines, 0);
	if (fl_lines_take(lines, "closed", 1))
		r->closed_at = fl_lines_utc(lines, 0);
	if (fl_lines_take(lines, "due", 3)) {
		r->due = fl_lines_day(lines, 0);
		r->interval_months = (int)fl_lines_whole(lines, 1);
		r->due_hours = fl_lines_real(lines, 2);
	}
	if (fl_lines_take(lines, "hours", 1))
		r->running_hours = fl_lines_real(lines, 0);
}

static unsigned read_work(fl_lines *lines) {
	for (int count = 0; count <= WORKS; count++) {
		/* The line has as many values as words; ask for the number that it has. */
		const char *at = lines->at, *line_end = memchr(at, '\n', (size_t)(lines->end - at));
		int tabs = 0;
		for (const char *c = at; line_end && c < line_end; c++)
			tabs += *c == '\t';
		if (tabs != count)
			continue;
		unsigned work = 0;
		if (!fl_lines_take(lines, "work", count))
			return 0;
		for (int v = 0; v < count; v++) {
			const char *const words[] = {works[0].word, works[1].word, works[2].word, works[3].word};
			work |= works[word_index(lines, v, words, WORKS)].flag;
		}
		return work;
	}
	fl_lines_take(lines, "work", 0);
	return 0;
}

static void read_point(fl_lines *lines, fl_kept_point *p) {
	p->point = (int)fl_lines_whole(lines, 0);
	p->oil = fl_lines_text(lines, 1);
	p->lot = fl_lines_text(lines, 2);
	p->x = fl_lines_real(lines, 3);
	p->error_span = fl_lines_real(lines, 4);
	p->U_span = fl_lines_real(lines, 5);
	p->k = fl_lines_real(lines, 6);
	p->tolerance_span = fl_lines_real(lines, 7);
	p->verdict = fl_lines_text(lines, 8);
}

/* Room for one more element; NULL with the reader failed when memory is out. */
static void *grow(fl_lines *lines, void *items, size_t count, size_t *capacity, size_t size) {
	void *grown = fl_arena_grow(lines->arena, items, count, capacity, size);
	if (!grown && lines->status >= 0)
		lines->status = fl_fail(lines->err, FL_E_MEMORY, "out of memory for an entry of the book");
	return grown;
}

static void read_run(fl_lines *lines, const char *name, fl_kept_run *run) {
	run->verdict = "";
	if (!fl_lines_take(lines, "run", 8))
		return;
	if (strcmp(fl_lines_text(lines, 0), name) != 0)
		fl_lines_fail(lines, "the runs stand in the wrong order");
	run->state = (fl_kept_state)word_index(lines, 1, state_words, 3);
	run->zero_span = fl_lines_real(lines, 2);
	run->zero_u_span = fl_lines_real(lines, 3);
	run->span_span = fl_lines_real(lines, 4);
	run->span_u_span = fl_lines_real(lines, 5);
	run->hysteresis_span = fl_lines_real(lines, 6);
	run->verdict = fl_lines_text(lines, 7);
	size_t capacity = 0;
	while (fl_lines_next_is(lines, "point") && fl_lines_take(lines, "point", 9)) {
		fl_kept_point *points = grow(lines, run->points, run->point_count, &capacity, sizeof *points);
		if (!points)
			return;
		run->points = points;
		read_point(lines, &points[run->point_count++]);
	}
}

static void read_items(fl_lines *lines, fl_record *r) {
	size_t capacity = 0;
	while (fl_lines_next_is(lines, "used") && fl_lines_take(lines, "used", 3)) {
		fl_kept_item *items = grow(lines, r->items, r->item_count, &capacity, sizeof *items);
		if (!items)
			return;
		r->items = items;
		items[r->item_count++] =
		    (fl_kept_item){fl_lines_text(lines, 0), fl_lines_text(lines, 1), fl_lines_text(lines, 2)};
	}
}

static void read_record(fl_lines *lines, fl_record *r) {
	read_names(lines, r);
	read_times(lines, r);
	r->procedure = take_text(lines, "procedure");
	r->program = take_text(lines, "program");
	r->performed_by = take_text(lines, "performed");
	r->work = read_work(lines);
	r->dial_unit = "";
	if (fl_lines_take(lines, "scale", 5)) {
		r->scale_low = fl_lines_real(lines, 0);
		r->scale_high = fl_lines_real(lines, 1);
		r->dial_unit = fl_lines_text(lines, 2);
		r->set_point = fl_lines_real(lines, 3);
		r->adjust_limit_span = fl_lines_real(lines, 4);
	}
	read_run(lines, "as-found", &r->as_found);
	read_run(lines, "as-left", &r->as_left);
	read_items(lines, r);
}

static void read_paper(fl_lines *lines, fl_paper *paper) {
	paper->record = take_text(lines, "record");
	if (lines->status >= 0 && !fl_is_digest(paper->record))
		fl_lines_fail(lines, "a digest is expected");
	paper->number = take_text(lines, "number");
	paper->stage = take_text(lines, "stage");
	paper->file = take_text(lines, "file");
}

static void spread_head(fl_entry *entry) {
	const fl_entry_head *h = &entry->head;
	fl_record *r = &entry->record;
	fl_paper *p = &entry->paper;
	if (h->kind == ENTRY_SESSION) {
		memcpy(r->origin, h->origin, sizeof r->origin);
		memcpy(r->previous, h->previous, sizeof r->previous);
		memcpy(r->journal_digest, h->carried.digest, sizeof r->journal_digest);
		r->sequence = h->sequence;
		r->journal_size = h->carried.size;
		r->kept_at = h->kept_at;
	} else {
		memcpy(p->origin, h->origin, sizeof p->origin);
		memcpy(p->paper_digest, h->carried.digest, sizeof p->paper_digest);
		p->sequence = h->sequence;
		p->size = h->carried.size;
		p->kept_at = h->kept_at;
	}
}

fl_status fl_facts_read(const char *facts, size_t length, fl_arena *arena, fl_entry *out, fl_error *err) {
	fl_lines lines;
	*out = (fl_entry){0};
	fl_lines_open(&lines, facts, length, arena, err);
	read_head(&lines, &out->head);
	if (lines.status >= 0 && out->head.kind == ENTRY_SESSION)
		read_record(&lines, &out->record);
	else if (lines.status >= 0)
		read_paper(&lines, &out->paper);
	fl_lines_take(&lines, "end", 0);
	spread_head(out);
	return fl_lines_close(&lines);
}

fl_status fl_facts_check_canonical(const char *facts, size_t length, const fl_entry *entry, fl_error *err) {
	fl_text again = {0};
	fl_status status = entry->head.kind == ENTRY_SESSION
	                       ? fl_facts_write_record(&entry->head, &entry->record, &again, err)
	                       : fl_facts_write_paper(&entry->head, &entry->paper, &again, err);
	if (status >= 0 && (again.length != length || memcmp(again.data, facts, length) != 0))
		status = fl_fail(err, FL_E_SYNTAX, "the entry is not written as this program writes it");
	fl_text_free(&again);
	return status;
}

/* ---- the founding ----------------------------------------------------------------------------------------------- */

fl_status fl_founding_check(const char *name, const char *prefix, fl_error *err) {
	static const char letters[] = "ABCDEFGHIJKLMNOPQRSTUVWXYZ", more[] = "ABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789";
	if (!name || !*name || strlen(name) > 90 || !fl_utf8_valid(name, strlen(name)) || fl_text_has_control(name))
		return fl_fail(err, FL_E_VALUE,
		               "a book needs the name of its ship or workshop, at most 90 bytes, without "
		               "control characters");
	if (!prefix || strlen(prefix) > 12 || !*prefix || !strchr(letters, *prefix) ||
	    strspn(prefix, more) != strlen(prefix))
		return fl_fail(err, FL_E_VALUE,
		               "the prefix of the numbers is 1 to 12 capital letters and digits, first a letter: such as QH");
	return FL_OK;
}

fl_status fl_founding_write(const fl_founding_text *founding, fl_text *out, fl_error *err) {
	fl_status status = fl_founding_check(founding->name, founding->prefix, err);
	if (status < 0)
		return status;
	fl_text_add(out, "foundleft-book\t1\n");
	line_text(out, "name", founding->name);
	line_text(out, "prefix", founding->prefix);
	begin(out, "founded");
	fl_put_utc(out, founding->at);
	end(out);
	line_text(out, "salt", founding->salt);
	if (*founding->continues) {
		begin(out, "continues");
		fl_put_text(out, founding->continues);
		fl_put_whole(out, founding->continues_at);
		fl_put_text(out, founding->continues_head);
		end(out);
	}
	return finish(out, err);
}

fl_status fl_founding_read(const char *text, size_t length, fl_arena *arena, fl_founding_text *out, fl_error *err) {
	fl_lines lines;
	*out = (fl_founding_text){0};
	fl_lines_open(&lines, text, length, arena, err);
	if (fl_lines_take(&lines, "foundleft-book", 1) && fl_lines_whole(&lines, 0) != 1)
		fl_lines_fail(&lines, "written by a later program: update this one");
	out->name = take_text(&lines, "name");
	out->prefix = take_text(&lines, "prefix");
	if (fl_lines_take(&lines, "founded", 1))
		out->at = fl_lines_utc(&lines, 0);
	const char *salt = take_text(&lines, "salt");
	if (lines.status >= 0 && (strlen(salt) != sizeof out->salt - 1 || strspn(salt, "0123456789abcdef") != strlen(salt)))
		fl_lines_fail(&lines, "32 hexadecimal digits are expected");
	else if (lines.status >= 0)
		memcpy(out->salt, salt, sizeof out->salt);
	if (fl_lines_next_is(&lines, "continues") && fl_lines_take(&lines, "continues", 3)) {
		fl_lines_digest(&lines, 0, out->continues);
		out->continues_at = fl_lines_whole(&lines, 1);
		fl_lines_digest(&lines, 2, out->continues_head);
	}
	fl_lines_take(&lines, "end", 0);
	fl_status status = fl_lines_close(&lines);
	return status < 0 ? status : fl_founding_check(out->name, out->prefix, err);
}
