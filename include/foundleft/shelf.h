/* foundleft/shelf.h - keeping the stock without writing YAML: guided questions that add an item or renew its
 * certificate, and the files that take what was answered.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * The conversation is a state fed with lines, as in foundleft/entry.h. What is answered so far is written as an item of
 * a stock file and read by fl_stock_parse after each answer: the checks are those of the files, and an error is shown
 * at once where it concerns what was asked already. Nothing is written before the last question is answered with yes.
 */
#ifndef FOUNDLEFT_SHELF_H
#define FOUNDLEFT_SHELF_H

#include "foundleft/base.h"
#include "foundleft/document.h"
#include "foundleft/stock.h"

typedef enum fl_shelf_kind { FL_SHELF_OIL, FL_SHELF_EQUIPMENT, FL_SHELF_INSTRUMENT, FL_SHELF_KINDS } fl_shelf_kind;
const char *fl_shelf_kind_word(fl_shelf_kind kind); /* "oil", "equipment", "instrument" */
const char *fl_shelf_kind_list(fl_shelf_kind kind); /* key in the files: "oils", "equipment", "instruments" */

typedef struct fl_shelf fl_shelf;

/* A conversation about a new item; `stock` is what there is already, borrowed. */
fl_status fl_shelf_add(fl_shelf **out, fl_shelf_kind kind, const fl_stock *stock, fl_error *err) FL_MUST_USE;
/* One about a new certificate of a lot or an equipment, or a new description of an instrument: what is likely to be the
 * same as in the newest one is proposed, numbers and days of the certificate are not. FL_E_NOT_FOUND; FL_E_VALUE where
 * the name is that of several kinds. */
fl_status fl_shelf_renew(fl_shelf **out, const char *name, const fl_stock *stock, fl_error *err) FL_MUST_USE;
void fl_shelf_free(fl_shelf *shelf);

fl_shelf_kind fl_shelf_kind_of(const fl_shelf *shelf);
/* The question, ending in "> ", a heading before it where a new part begins. */
void fl_shelf_prompt(fl_shelf *shelf, fl_text *out);
/* Feeds one line. An empty one takes what stands in brackets, or leaves out what is optional. Commands: ? (help), back,
 * back NAME, show, stop. A refused line gives the status and `err`, and the question that the error concerns is asked
 * again; only FL_E_MEMORY ends the conversation. */
fl_status fl_shelf_line(fl_shelf *shelf, const char *line, fl_text *say, fl_error *err) FL_MUST_USE;
bool fl_shelf_finished(const fl_shelf *shelf);
bool fl_shelf_agreed(const fl_shelf *shelf); /* finished, and to be written */
/* Name of the item: lot, id or tag; "" before it was asked. */
const char *fl_shelf_name(const fl_shelf *shelf);
/* The item as a block of YAML, its first field in the first column; lives until the next line is fed. */
const char *fl_shelf_block(fl_shelf *shelf);

/* ---- the files (store.c) ---- */

/* `text` with the item added behind the last one of its list; nothing else changes, comments stay. An empty text
 * becomes a file of that list. FL_E_STATE where the list is written in a way that cannot be added to. */
fl_status fl_shelf_insert(const char *text, const char *file, fl_shelf_kind kind, const char *block, fl_text *out,
                          fl_error *err) FL_MUST_USE;
/* Adds the item to a file of the folder: the first of `paths` that has such a list, else <folder>/<list>.yaml. The
 * whole stock is read again with it before anything is written; the file is replaced in one step. `path` gets the file.
 */
fl_status fl_shelf_store(const fl_io *io, const char *folder, char *const *paths, size_t count, fl_shelf_kind kind,
                         const char *block, char path[512], fl_error *err) FL_MUST_USE;

#endif
