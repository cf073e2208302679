/* test_nonsense.c - what nobody should type, at every step: the conversation goes on and the journal stays sound.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "talk.h"

static const char *const words[] = {
    "yes",
    "no",
    "close",
    "done",
    "adjust",
    "leave",
    "repair",
    "undo",
    "undo why",
    "strike",
    "strike 27 x",
    "list",
    "?",
    "w",
    "w 4.02",
    "watch 7.06 at 40",
    "remark x",
    "none",
    "TH-7",
    "BA-2",
    "MA-3",
    "TC-1",
    "2511B",
    "2511E",
    "2411B",
    "LK-10",
    "4.02",
    "7.06 at 40.00",
    "19.26 40",
    "7.06",
    "40",
    "104",
    "4.02 mA, 1 bar",
    "nan",
    "1e308 1e308",
    "-",
    "",
    ",",
    ";;",
    "at at at",
    "@",
    "1,234",
    "0.2 bar",
    "60",
    "50",
    "1710",
    "38 °C",
    "\u2212\u2212",
    "\xff\xfe",
    "\t\t",
    "%s%n%d",
    "\\t\\n",
    "Ωμέγα",
    "7.06 at 40.00 at 40.00 at 40.00",
    "9999999999999999999999",
    "strike -1",
    "strike 0",
};

/* Twenty sessions of 300 random lines each; now and then the machine dies and the session is taken up again. */
static void random_lines_leave_a_sound_journal(void **state) {
	uint64_t seed = UINT64_C(777); /* xorshift64, fixed */
	for (int session = 0; session < 20; session++) {
		talk t;
		talk_begin(&t, *state, session % 2 ? SMALL_PROCEDURE : SMALL_WATCHED);
		if (session % 4)
			talk_take_all(&t, lines_before, COUNT(lines_before));
		if (session % 4 == 3)
			talk_take_all(&t, lines_as_found, session % 8 == 3 ? 5 : 0);
		for (int i = 0; i < 300 && !t.journal.session.closed; i++) {
			seed ^= seed << 13;
			seed ^= seed >> 7;
			seed ^= seed << 17;
			fl_text prompt = {0};
			fl_entry_prompt(t.entry, &prompt);
			assert_non_null(prompt.data);
			fl_text_free(&prompt);
			int before = t.journal.session.last_sequence;
			fl_status status = talk_line(&t, words[(seed >> 20) % COUNT(words)]);
			if (status < 0)
				assert_true(t.err.message[0] && !strchr(t.err.message, '\n'));
			if (status < 0)
				assert_int_equal(t.journal.session.last_sequence, before);
			if (seed % 37 == 0) {
				fl_entry_free(t.entry);
				fl_journal_close(&t.journal);
				assert_int_equal(fl_journal_resume(&t.journal, fl_io_system(), t.path, t.now, &t.err), FL_OK);
				talk_attach(&t);
				assert_true(t.journal.session.last_sequence >= before);
			}
		}
		fl_session back = {0};
		char head[FL_DIGEST_HEX_SIZE];
		bool torn;
		assert_int_equal(fl_journal_read(fl_io_system(), t.path, &back, head, &torn, &t.err), FL_OK);
		assert_int_equal(back.last_sequence, t.journal.session.last_sequence);
		assert_string_equal(head, t.journal.head);
		fl_session_free(&back);
		talk_end(&t);
	}
}

int main(void) {
	const struct CMUnitTest tests[] = {IN_SCRATCH(random_lines_leave_a_sound_journal)};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
