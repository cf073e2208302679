/* test_nonsense.c - lines with right digests and wrong content: the reader behind the chain. The generator is the fuzz
 * target's, driven here by a fixed seed, so that it runs with every test run and under the sanitizers.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "../fuzz/fuzz_journal.c"
#include "bench.h"

static const char sound[] = "1\t2026-04-14T08:00:00Z\topen\tformat=1\tprogram=0.1.0\tday=2026-04-14\tsource=keyboard\t"
                            "clock=machine\n"
                            "2\t2026-04-14T08:00:01Z\ttext\tkind=procedure\tname=p\tbody=id: p\\n\n"
                            "3\t2026-04-14T08:00:01Z\ttext\tkind=instrument\tname=i\tbody=tag: i\\n\n"
                            "4\t2026-04-14T08:00:02Z\tset\tid=ambient\ttyped=22,5\tunit=°C\tvalue=22.5\n"
                            "5\t2026-04-14T08:00:03Z\tpoint\tpoint=1\toil=\tlot=\n"
                            "6\t2026-04-14T08:00:04Z\trun\trun=as-found\n"
                            "7\t2026-04-14T08:00:05Z\tread\trun=as-found\tcycle=1\tpass=rising\tpoint=1\tnumber=1\t"
                            "typed=7,064\tunit=mA\tvalue=7.064\ttemp=39,91\ttemp-c=39.91\n"
                            "8\t2026-04-14T08:00:06Z\tstrike\ttarget=7\treason=air\tby=A\n"
                            "9\t2026-04-14T08:00:07Z\tremark\ttyped=a\\tb\\\\c\n";

static fl_status read_sealed(const char *lines, size_t length, fl_session *session, fl_error *err) {
	fl_text journal = {0};
	char head[FL_DIGEST_HEX_SIZE];
	bool torn;
	seal_lines(lines, length, &journal);
	memory_file file = {.bytes = journal.data, .length = journal.length};
	fl_io io = {.open = memory_open, .read = memory_read, .close = memory_close, .self = &file};
	fl_status status = fl_journal_read(&io, "sealed.flj", session, head, &torn, err);
	fl_text_free(&journal);
	return status;
}

static void the_sound_lines_are_read(void **state) {
	(void)state;
	fl_session s = {0};
	fl_error err = {0};
	fl_status status = read_sealed(sound, sizeof sound - 1, &s, &err);
	if (status < 0)
		print_error("line %d: %s\n", err.line, err.message);
	assert_int_equal(status, FL_OK);
	assert_int_equal(s.last_sequence, 9);
	assert_true(s.readings[0].struck);
	assert_string_equal(s.remarks[0].typed, "a\tb\\c");
	fl_session_free(&s);
}

static void each_wrong_form_is_refused_with_its_line(void **state) {
	(void)state;
	static const struct {
		const char *wrong, *right, *part;
		int line;
	} cases[] = {
	    {"\tkind=procedure", "\tkind=recipe", "cannot be \"recipe\"", 2},
	    {"2\t2026-04-14T08:00:01Z", "3\t2026-04-14T08:00:01Z", "cannot follow", 2},
	    {"2\t2026-04-14T08:00:01Z", "02\t2026-04-14T08:00:01Z", "sequence number", 2},
	    {"2\t2026-04-14T08:00:01Z", "2\t2026-04-31T08:00:01Z", "", 2},
	    {"\trun\trun", "\trunning\trun", "unknown kind of entry", 6},
	    {"\tpoint=1\toil=\tlot=", "\toil=\tpoint=1\tlot=", "out of order", 5},
	    {"\tpoint=1\toil=\tlot=", "\tpoint=1\toil=\toil=", "twice", 5},
	    {"\tpoint=1\toil=\tlot=", "\tpoint=1\toil=\tbatch=", "unknown field", 5},
	    {"\tpoint=1\toil=\tlot=", "\tpoint=1\toil=", "needs the field \"lot\"", 5},
	    {"a\\tb", "a\\xb", "escape", 9},
	    {"\\\\c", "c\\", "escape", 9},
	    {"value=7.064", "value=7,064", "cannot be \"7,064\"", 7},
	    {"value=7.064", "value=inf", "cannot be \"inf\"", 7},
	    {"value=7.064", "value=3.5", "NE 43", 7},
	    {"\ttemp-c=39.91", "", "lacks its typed text or its value", 7},
	    {"target=7", "target=6", "no reading", 8},
	};
	for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
		const char *at = strstr(sound, cases[i].wrong);
		assert_non_null(at);
		fl_text text = {0};
		fl_text_append(&text, sound, (size_t)(at - sound));
		fl_text_add(&text, cases[i].right);
		fl_text_add(&text, at + strlen(cases[i].wrong));
		fl_session s = {0};
		fl_error err = {0};
		assert_int_equal(read_sealed(text.data, text.length, &s, &err), FL_E_TAMPERED);
		if (err.line != cases[i].line || !strstr(err.message, cases[i].part))
			print_error("%s: line %d, %s\n", cases[i].right, err.line, err.message);
		assert_int_equal(err.line, cases[i].line);
		assert_non_null(strstr(err.message, cases[i].part));
		fl_text_free(&text);
	}
}

static void nonsense_never_crashes(void **state) {
	(void)state;
	uint64_t seed = UINT64_C(20260414); /* xorshift64, fixed */
	enum { SIZE = sizeof sound + 64 };
	uint8_t input[SIZE];
	for (int round = 0; round < 20000; round++) {
		size_t length = sizeof sound;
		input[0] = (uint8_t)(round % 8 == 0);
		memcpy(input + 1, sound, sizeof sound - 1);
		for (int change = 0; change <= round % 5; change++) {
			seed ^= seed << 13;
			seed ^= seed >> 7;
			seed ^= seed << 17;
			size_t at = 1 + (size_t)(seed >> 16) % (length - 1);
			switch (seed % 4) {
			case 0:
				input[at] = (uint8_t)(seed >> 40);
				break;
			case 1:
				input[at] = (uint8_t) "\t\n\\=0-.z"[(seed >> 40) % 8];
				break;
			case 2:
				length = at + 1;
				break;
			default:
				memmove(input + at, input + 1, length - at);
				break;
			}
		}
		assert_int_equal(LLVMFuzzerTestOneInput(input, length), 0);
	}
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(the_sound_lines_are_read),
	    cmocka_unit_test(each_wrong_form_is_refused_with_its_line),
	    cmocka_unit_test(nonsense_never_crashes),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
