/* cause/matrix.c - small dense matrices by Cholesky's decomposition.
 *
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * A few dozen rows at most, so nothing here is blocked or pivoted. Golub and Van Loan, Matrix Computations, ch. 4.2.
 */
#include "cause_private.h"

bool fl_cause_cholesky(double *A, size_t n) {
	for (size_t j = 0; j < n; j++) {
		for (size_t i = j; i < n; i++) {
			double sum = A[i * n + j];
			for (size_t k = 0; k < j; k++)
				sum -= A[i * n + k] * A[j * n + k];
			if (i == j && !(sum > 0.0 && isfinite(sum)))
				return false;
			A[i * n + j] = i == j ? sqrt(sum) : sum / A[j * n + j];
		}
	}
	return true;
}

void fl_cause_forward(const double *L, size_t n, double *b) {
	for (size_t i = 0; i < n; i++) {
		for (size_t k = 0; k < i; k++)
			b[i] -= L[i * n + k] * b[k];
		b[i] /= L[i * n + i];
	}
}

void fl_cause_back(const double *L, size_t n, double *b) {
	for (size_t i = n; i-- > 0;) {
		for (size_t k = i + 1; k < n; k++)
			b[i] -= L[k * n + i] * b[k];
		b[i] /= L[i * n + i];
	}
}

bool fl_cause_invert(double *A, size_t n, double *inverse) {
	if (!fl_cause_cholesky(A, n))
		return false;
	for (size_t j = 0; j < n; j++) { /* the inverse is symmetric: its rows are its columns */
		double *column = inverse + j * n;
		for (size_t i = 0; i < n; i++)
			column[i] = i == j ? 1.0 : 0.0;
		fl_cause_forward(A, n, column);
		fl_cause_back(A, n, column);
	}
	return true;
}
