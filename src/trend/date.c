/* date.c - due dates.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "foundleft/trend.h"

static int days_of(int year, int month) {
	fl_day first = fl_day_from_civil(year, month, 1);
	return month == 12 ? 31 : (int)(fl_day_from_civil(year, month + 1, 1) - first);
}

fl_day fl_trend_due(fl_day calibrated_on, int months) {
	int year = 0, month = 0, day = 0;
	if (calibrated_on == FL_NO_DAY)
		return FL_NO_DAY;
	fl_day_to_civil(calibrated_on, &year, &month, &day);
	int ahead = year * 12 + month - 1 + months;
	int last = days_of(ahead / 12, ahead % 12 + 1);
	return fl_day_from_civil(ahead / 12, ahead % 12 + 1, day < last ? day : last);
}
