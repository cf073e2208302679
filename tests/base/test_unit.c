/* Units: every spelling, both directions, amounts with their unit.
 * Factors: SI Brochure, 9th edition, table 8 and section 5.4 (prefixes); psi from lb = 0.453 592 37 kg exactly,
 * inch = 25.4 mm exactly, g = 9.806 65 m/s2 (NIST SP 811, appendix B.8); 1 cSt = 1 mm2/s, 1 cP = 1 mPa.s by definition.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "check.h"
#include "foundleft/base.h"

#define COUNT(a) (sizeof(a) / sizeof(a)[0])

static const struct {
	fl_unit unit;
	const char *spellings; /* separated by ';' */
} accepted[] = {
    {FL_U_MA, "mA;ma;MA; mA ;\u00A0mA"},
    {FL_U_BAR, "bar;Bar;BAR"},
    {FL_U_MBAR, "mbar;hPa;hpa"},
    {FL_U_PSI, "psi;PSI;lbf/in2;lbf/in²;lbf/in^2"},
    {FL_U_KPA, "kPa;kpa;KPA"},
    {FL_U_PA, "Pa;pa;PA"},
    {FL_U_CELSIUS, "°C;ºC;\u2103;degC;deg C;° C;C;c;Celsius;degc;°c"},
    {FL_U_FAHRENHEIT, "°F;ºF;\u2109;degF;deg F;F;Fahrenheit"},
    {FL_U_KELVIN, "K;kelvin"},
    {FL_U_MM2_S, "mm²/s;mm2/s;mm^2/s;mm² s⁻¹;cSt;cst;CST"},
    {FL_U_MPA_S, "mPa·s;mPa\u22C5s;mPa.s;mPa*s;mPa s;mPas;mpas;cP;cp"},
    {FL_U_REDWOOD_S, "s Redwood No. 1;s redwood no.1;Redwood No. 1 s;Redwood No. 1;Redwood No.1;Redwood 1;RW1;s RW1"},
    {FL_U_SAYBOLT_S, "s Saybolt Universal;Saybolt Universal s;Saybolt Universal;SUS;SSU;ssu"},
    {FL_U_KG_M3, "kg/m³;kg/m3;kg/m^3;kg m⁻³"},
    {FL_U_MM, "mm"},
    {FL_U_M, "m"},
    {FL_U_CM3_REV, "cm³/rev;cm3/rev;cm³/r;cc/rev;ml/rev;mL/rev"},
    {FL_U_CM3, "cm³;cm3;cm^3;CM3;ccm;cc;ml;mL"},
    {FL_U_R_MIN, "r/min;rev/min;rpm;RPM;1/min;min⁻¹;min-1;min\u22121"},
    {FL_U_HZ, "Hz;hz"},
    {FL_U_V, "V;v"},
    {FL_U_S, "s;sec"},
    {FL_U_MIN, "min;MIN"},
    {FL_U_PERCENT, "%;percent"},
    {FL_U_PERCENT_SPAN, "% of span;% of  span;% span;%span;percent of span"},
    {FL_U_PERCENT_READING, "% of reading;% reading;%reading;percent of reading"},
    {FL_U_PERCENT_RH, "%rh;%RH;% rh;% r.h."},
    {FL_U_NONE, ""},
};

static void every_spelling(void **state) {
	(void)state;
	for (size_t i = 0; i < COUNT(accepted); i++) {
		char all[400];
		snprintf(all, sizeof all, "%s", accepted[i].spellings);
		for (char *rest = all, *one; (one = strsep(&rest, ";"));) {
			fl_unit unit = FL_UNIT_COUNT;
			fl_error err = {0};
			if (fl_unit_parse(one, &unit, &err) != FL_OK || unit != accepted[i].unit)
				fail_msg("\"%s\": unit %d, %s", one, (int)unit, err.message);
		}
	}
}

static void what_we_write_we_read(void **state) {
	(void)state;
	assert_int_equal(COUNT(accepted), FL_UNIT_COUNT);
	for (int i = 0; i < FL_UNIT_COUNT; i++) {
		fl_unit unit;
		assert_int_equal(fl_unit_parse(fl_unit_text((fl_unit)i), &unit, NULL), FL_OK);
		assert_int_equal(unit, i);
	}
	assert_string_equal(fl_unit_text(FL_UNIT_COUNT), "");
	assert_int_equal(fl_unit_quantity(FL_UNIT_COUNT), FL_Q_NONE);
}

static void refused_units(void **state) {
	(void)state;
	static const struct {
		const char *text, *says;
	} cases[] = {
	    {"MPa", "kPa, Pa"},
	    {"MPa·s", "perhaps mPa·s"},
	    {"Mbar", "mbar"},
	    {"MM", "mm"},
	    {"M", "perhaps m"},
	    {"k", "perhaps K"},
	    {"S", "perhaps s"},
	    {"Redwood", "perhaps s Redwood No. 1"},
	    {"Saybolt", "perhaps s Saybolt Universal"},
	    {"Saybolt Furol", "write one of mA"},
	    {"psia", "perhaps psi"},
	    {"furlong", "°C, °F, K, mm²/s, mPa·s"},
	    {"mA mA", "perhaps mA"},
	    {"m\u00B5", "write one of"},
	};
	for (size_t i = 0; i < COUNT(cases); i++) {
		fl_unit unit = FL_UNIT_COUNT;
		fl_error err = {0};
		fl_status status = fl_unit_parse(cases[i].text, &unit, &err);
		if (status != FL_E_VALUE || !strstr(err.message, cases[i].says))
			fail_msg("\"%s\": status %d, \"%s\"", cases[i].text, (int)status, err.message);
		assert_int_equal(unit, FL_UNIT_COUNT);
	}
	char text[201];
	memset(text, 'm', 200);
	text[200] = '\0';
	fl_unit unit;
	assert_int_equal(fl_unit_parse(text, &unit, NULL), FL_E_VALUE);
}

static void values_to_the_inside(void **state) {
	(void)state;
	check_close("10.42 mA in A", 0.01042, fl_to_inside(10.42, FL_U_MA), 1e-15);
	check_close("7.6 psi in Pa", 7.6 * 0.45359237 * 9.80665 / (0.0254 * 0.0254), fl_to_inside(7.6, FL_U_PSI), 1e-15);
	check_close("0.52 bar in Pa", 52000, fl_to_inside(0.52, FL_U_BAR), 1e-15);
	check_close("983.5 mbar in Pa", 98350, fl_to_inside(983.5, FL_U_MBAR), 1e-15);
	check_close("12.85 kPa in Pa", 12850, fl_to_inside(12.85, FL_U_KPA), 1e-15);
	check_near("212 °F in °C", 100, fl_to_inside(212, FL_U_FAHRENHEIT), 0.0);
	check_near("-40 °F in °C", -40, fl_to_inside(-40, FL_U_FAHRENHEIT), 0.0);
	check_near("100 °C in °F", 212, fl_from_inside(100, FL_U_FAHRENHEIT), 0.0);
	check_close("12.385 mm2/s in m2/s", 12.385e-6, fl_to_inside(12.385, FL_U_MM2_S), 1e-15);
	check_close("17.25 mPa.s in Pa.s", 0.01725, fl_to_inside(17.25, FL_U_MPA_S), 1e-15);
	check_close("1.75 cm3/rev in m3", 1.75e-6, fl_to_inside(1.75, FL_U_CM3_REV), 1e-15);
	check_close("345 r/min in 1/s", 5.75, fl_to_inside(345, FL_U_R_MIN), 1e-15);
	check_close("0.85 % as fraction", 0.0085, fl_to_inside(0.85, FL_U_PERCENT_SPAN), 1e-15);
	check_close("47 %rh as fraction", 0.47, fl_to_inside(47, FL_U_PERCENT_RH), 1e-15);
	check_close("2.5 min in s", 150, fl_to_inside(2.5, FL_U_MIN), 1e-15);
}

static void there_and_back(void **state) {
	(void)state;
	static const double values[] = {2.385, -17.25, 0.0043, 98350.75};
	for (int unit = 0; unit < FL_UNIT_COUNT; unit++)
		for (size_t i = 0; i < COUNT(values); i++)
			check_near(fl_unit_text((fl_unit)unit), values[i],
			           fl_from_inside(fl_to_inside(values[i], (fl_unit)unit), (fl_unit)unit),
			           /* the Fahrenheit offset costs digits of a small value */
			           (values[i] < 0 ? -values[i] : values[i]) * 4e-16 + (unit == FL_U_FAHRENHEIT ? 3e-14 : 0));
}

static void amounts(void **state) {
	(void)state;
	static const struct {
		const char *text, *typed;
		double value;
		fl_unit unit;
		fl_status status;
	} cases[] = {
	    {"10.42 mA", "10.42", 10.42, FL_U_MA, FL_OK},
	    {"0,52bar", "0,52", 0.52, FL_U_BAR, FL_OK},
	    {"7.6 psi", "7.6", 7.6, FL_U_PSI, FL_OK},
	    {" 12 ", "12", 12, FL_U_MA, FL_OK},
	    {"\u22123.5 °C", "\u22123.5", -3.5, FL_U_CELSIUS, FL_OK},
	    {"50\u00A0°C", "50", 50, FL_U_CELSIUS, FL_OK},
	    {"-3.5F", "-3.5", -3.5, FL_U_FAHRENHEIT, FL_OK},
	    {"0.85 % of span", "0.85", 0.85, FL_U_PERCENT_SPAN, FL_OK},
	    {"47%rh", "47", 47, FL_U_PERCENT_RH, FL_OK},
	    {"345 1/min", "345", 345, FL_U_R_MIN, FL_OK},
	    {"1e3Pa", "1e3", 1000, FL_U_PA, FL_OK},
	    {"35 s Redwood No. 1", "35", 35, FL_U_REDWOOD_S, FL_OK},
	    {"1.234 mm²/s", "1.234", 1.234, FL_U_MM2_S, FL_ASK},
	    {"1.234,5 kg/m3", "1.234,5", 1234.5, FL_U_KG_M3, FL_OK},
	};
	for (size_t i = 0; i < COUNT(cases); i++) {
		fl_decimal number;
		fl_unit unit;
		double thousands = 0;
		fl_error err = {0};
		fl_status status = fl_amount_parse(cases[i].text, FL_U_MA, &number, &unit, &thousands, &err);
		if (status != cases[i].status)
			fail_msg("\"%s\": status %d, \"%s\"", cases[i].text, (int)status, err.message);
		assert_string_equal(number.typed, cases[i].typed);
		check_near(cases[i].text, cases[i].value, number.value, 0.0);
		assert_int_equal(unit, cases[i].unit);
		check_near("thousands", status == FL_ASK ? 1234 : 0, thousands, 0.0);
	}
}

static void refused_amounts(void **state) {
	(void)state;
	char long_text[201];
	memset(long_text, '8', 200);
	long_text[200] = '\0';
	static const char *const number_wrong[] = {"",         "mA",        "nan mA", "inf",       "0x1F",      "1 234 mA",
	                                           "1.2.3 mA", "10.42. mA", "- 5 mA", "1'234 bar", "\u2212 bar"};
	for (size_t i = 0; i <= COUNT(number_wrong); i++) {
		fl_decimal number = {.value = 42};
		fl_unit unit = FL_U_BAR;
		fl_error err = {0};
		const char *text = i < COUNT(number_wrong) ? number_wrong[i] : long_text;
		fl_status status = fl_amount_parse(text, FL_U_MA, &number, &unit, NULL, &err);
		if (status != FL_E_SYNTAX)
			fail_msg("\"%s\": status %d, \"%s\"", text, (int)status, err.message);
		check_near("untouched", 42, number.value, 0.0);
		assert_int_equal(unit, FL_U_BAR);
		assert_true(err.message[0]);
	}
	fl_decimal number;
	fl_unit unit = FL_U_BAR;
	fl_error err = {0};
	assert_int_equal(fl_amount_parse("12.5 furlong", FL_U_MA, &number, &unit, NULL, &err), FL_E_VALUE);
	assert_non_null(strstr(err.message, "unknown unit \"furlong\""));
	assert_int_equal(fl_amount_parse("1e999 mA", FL_U_MA, &number, &unit, NULL, NULL), FL_E_RANGE);
	assert_int_equal(unit, FL_U_BAR);
}

int main(void) {
	const struct CMUnitTest tests[] = {
	    cmocka_unit_test(every_spelling),  cmocka_unit_test(what_we_write_we_read),
	    cmocka_unit_test(refused_units),   cmocka_unit_test(values_to_the_inside),
	    cmocka_unit_test(there_and_back),  cmocka_unit_test(amounts),
	    cmocka_unit_test(refused_amounts),
	};
	return cmocka_run_group_tests(tests, NULL, NULL);
}
