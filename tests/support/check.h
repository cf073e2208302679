/* check.h - what cmocka lacks: comparing doubles so that a failure prints want, got, tolerance and name.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef FOUNDLEFT_TEST_CHECK_H
#define FOUNDLEFT_TEST_CHECK_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

/* Fails unless |got - want| <= tolerance (absolute); NaN fails. */
#define check_near(name, want, got, tolerance) check_near_at(name, want, got, tolerance, __FILE__, __LINE__)
/* Fails unless |got - want| <= relative * |want|. */
#define check_close(name, want, got, relative) \
	check_near_at(name, want, got, (relative) * ((want) < 0 ? -(want) : (want)), __FILE__, __LINE__)

void check_near_at(const char *name, double want, double got, double tolerance, const char *file, int line);

#endif
