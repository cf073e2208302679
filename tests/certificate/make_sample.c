/* make_sample.c - writes the certificate of a sample case: make_sample STORY FACES PDF TEXT. What readback.sh reads.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "sample.h"

static const struct {
	const char *name;
	sample_wish wish;
} stories[] = {
    {"adjusted",
     {.zero_span = 0.0025,
      .gain = 0.0249,
      .left_zero_span = 0.001,
      .left_gain = -0.0008,
      .decision = FL_DECISION_ADJUST,
      .struck = 2,
      .remarks = 2}},
    {"left", {.zero_span = 0.0017, .gain = 0.0085, .decision = FL_DECISION_LEAVE}},
    {"indicative", {.zero_span = 0.0017, .gain = 0.0085, .decision = FL_DECISION_LEAVE, .tachometer = true}},
    {"missing", {.missing_as_found = true, .left_gain = 0.001, .decision = FL_DECISION_ADJUST}},
    {"imported", {.zero_span = 0.0017, .gain = 0.0085, .decision = FL_DECISION_LEAVE, .source = FL_SOURCE_IMPORT}},
    {"shipboard", {.template_name = "shipboard-check", .gain = 0.012, .decision = FL_DECISION_LEAVE}},
    {"transmitter", {.template_name = "transmitter-alone", .gain = 0.004, .decision = FL_DECISION_LEAVE}},
    {"names",
     {.customer = "Ναυτιλιακή Εταιρεία Φάρος; Щербакова и Жданов; Łódź Żegluga; Åstrøm & Søn",
      .performer = "Юлия Щербакова",
      .gain = 0.001,
      .decision = FL_DECISION_LEAVE}},
};

static int write_file(const char *path, const void *bytes, size_t length) {
	FILE *file = fopen(path, "wb");
	if (!file || fwrite(bytes, 1, length, file) != length || fclose(file) != 0) {
		perror(path);
		return 1;
	}
	return 0;
}

int main(int argc, char **argv) {
	if (argc != 5) {
		fprintf(stderr, "usage: make_sample STORY FACES PDF TEXT\n");
		return 2;
	}
	for (size_t i = 0; i < sizeof stories / sizeof *stories; i++) {
		if (strcmp(stories[i].name, argv[1]) != 0)
			continue;
		sample_case one;
		fl_error err = {0};
		fl_text text = {0};
		unsigned char *bytes;
		size_t length;
		sample_make(&one, &stories[i].wish);
		sample_assess(&one);
		fl_sheet *sheet = sample_sheet(&one);
		sample_must(fl_certificate_pdf(sheet, fl_io_system(), &(fl_faces){argv[2]}, &bytes, &length, &err), &err,
		            "pdf");
		fl_sheet_text(sheet, &text);
		int failed = write_file(argv[3], bytes, length) | write_file(argv[4], text.data, text.length);
		free(bytes);
		fl_text_free(&text);
		fl_sheet_free(sheet);
		sample_free(&one);
		return failed;
	}
	fprintf(stderr, "make_sample: no story %s\n", argv[1]);
	return 2;
}
