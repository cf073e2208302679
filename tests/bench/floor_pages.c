/* floor_pages.c - the floor of `foundleft assess` and `foundleft certify`: only lets libharu write the same pages.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 *	floor_pages FACES-FOLDER OUT.pdf
 *
 * What is the same:
 *   - every text, rule, path and grey of the certificate, at the same place and in the same order: main_job_record.py
 *     takes them from the certificate itself, as a table that is compiled in, so that nothing is parsed here
 *   - A4, compressed streams, the same two faces from the same files, embedded
 * What it leaves out: reading a journal, checking digests, computing, reporting, wording, breaking lines, PDF/A (colour
 * profile, metadata, CIDSet), syncing the file.
 * It uses libharu as its manual shows: UTF-8 encoding, LoadTTFontFromFile, ShowText.
 */
#include <hpdf.h>
#include <stdio.h>
#include <stdlib.h>

enum op {
	PAGE,
	BEGIN_TEXT,
	END_TEXT,
	FACE,
	TEXT_AT,
	SHOW,
	FILL_GREY,
	STROKE_GREY,
	WIDTH,
	MOVE,
	LINE,
	STROKE,
	CLOSE_STROKE,
	FILL,
	CLOSE_FILL_STROKE,
	SAVE,
	RESTORE,
	CLIP,
	END_PATH
};

static const struct step {
	enum op op;
	double number[2];
	const char *text;
} steps[] = {
#include "pages.inc"
};
enum { STEPS = sizeof steps / sizeof steps[0] };

static void stop(HPDF_STATUS error, HPDF_STATUS detail, void *data) {
	(void)data;
	fprintf(stderr, "floor_pages: libharu says %04lX, %lu\n", (unsigned long)error, (unsigned long)detail);
	exit(1);
}

static HPDF_Font load(HPDF_Doc pdf, const char *folder, const char *file) {
	char path[4096];
	snprintf(path, sizeof path, "%s/%s", folder, file);
	return HPDF_GetFont(pdf, HPDF_LoadTTFontFromFile(pdf, path, HPDF_TRUE), "UTF-8");
}

static void set(HPDF_Page page, const HPDF_Font faces[2], const struct step *s) {
	const float n[2] = {(float)s->number[0], (float)s->number[1]};
	switch (s->op) {
	case PAGE:
		break;
	case BEGIN_TEXT:
		HPDF_Page_BeginText(page);
		break;
	case END_TEXT:
		HPDF_Page_EndText(page);
		break;
	case FACE:
		HPDF_Page_SetFontAndSize(page, faces[(int)n[0]], n[1]);
		break;
	case TEXT_AT:
		HPDF_Page_MoveTextPos(page, n[0], n[1]);
		break;
	case SHOW:
		HPDF_Page_ShowText(page, s->text);
		break;
	case FILL_GREY:
		HPDF_Page_SetGrayFill(page, n[0]);
		break;
	case STROKE_GREY:
		HPDF_Page_SetGrayStroke(page, n[0]);
		break;
	case WIDTH:
		HPDF_Page_SetLineWidth(page, n[0]);
		break;
	case MOVE:
		HPDF_Page_MoveTo(page, n[0], n[1]);
		break;
	case LINE:
		HPDF_Page_LineTo(page, n[0], n[1]);
		break;
	case STROKE:
		HPDF_Page_Stroke(page);
		break;
	case CLOSE_STROKE:
		HPDF_Page_ClosePathStroke(page);
		break;
	case FILL:
		HPDF_Page_Fill(page);
		break;
	case CLOSE_FILL_STROKE:
		HPDF_Page_ClosePathFillStroke(page);
		break;
	case SAVE:
		HPDF_Page_GSave(page);
		break;
	case RESTORE:
		HPDF_Page_GRestore(page);
		break;
	case CLIP:
		HPDF_Page_Clip(page);
		break;
	case END_PATH:
		HPDF_Page_EndPath(page);
		break;
	}
}

int main(int argc, char **argv) {
	if (argc != 3)
		return 2;
	HPDF_Doc pdf = HPDF_New(stop, NULL);
	HPDF_SetCompressionMode(pdf, HPDF_COMP_ALL);
	HPDF_UseUTFEncodings(pdf);
	const HPDF_Font faces[2] = {load(pdf, argv[1], "regular.ttf"), load(pdf, argv[1], "bold.ttf")};
	HPDF_Page page = NULL;
	for (int i = 0; i < STEPS; i++) {
		if (steps[i].op == PAGE) {
			page = HPDF_AddPage(pdf);
			HPDF_Page_SetSize(page, HPDF_PAGE_SIZE_A4, HPDF_PAGE_PORTRAIT);
		}
		set(page, faces, &steps[i]);
	}
	HPDF_SaveToFile(pdf, argv[2]);
	HPDF_Free(pdf);
	return 0;
}
