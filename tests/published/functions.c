/* tests/published/functions.c - the functions a published case may name, each a thin call of production code.
 * SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Viscosities are given and returned in mm²/s, dynamic ones in mPa·s, temperatures in °C unless a name says _f.
 */
#include "functions.h"

#include "foundleft/numeric.h"
#include "foundleft/physics.h"

#include <math.h>
#include <string.h>

/* ---- straight lines: columns x, y; an optional number is the origin of x ---- */

static bool fit_line(const given *g, fl_line *line) {
	double x[MAX_ROWS], origin = g->number_count > 0 ? g->numbers[0] : 0.0;
	for (size_t i = 0; i < g->rows; i++)
		x[i] = g->columns[0][i] - origin;
	return fl_numeric_line(x, g->columns[1], g->rows, line, NULL) == FL_OK;
}

/* One field of the line. */
#define LINE_FIELD(name, fit, expression)          \
	static double name(const given *g) {           \
		fl_line line = {0};                        \
		return fit(g, &line) ? (expression) : NAN; \
	}

LINE_FIELD(line_intercept, fit_line, line.intercept)
LINE_FIELD(line_slope, fit_line, line.slope)
LINE_FIELD(line_u_intercept, fit_line, sqrt(line.var_intercept))
LINE_FIELD(line_u_slope, fit_line, sqrt(line.var_slope))
LINE_FIELD(line_cov, fit_line, line.cov)
LINE_FIELD(line_correlation, fit_line, line.cov / sqrt(line.var_intercept * line.var_slope))
LINE_FIELD(line_s, fit_line, line.s)
LINE_FIELD(line_sum_sq, fit_line, line.sum_sq)
LINE_FIELD(line_dof, fit_line, (double)line.dof)

static double line_at(const given *g) {
	fl_line line;
	double y = 0.0, u;
	if (!fit_line(g, &line))
		return NAN;
	fl_numeric_line_at(&line, g->numbers[1] - g->numbers[0], &y, &u);
	return y;
}

static double line_u_at(const given *g) {
	fl_line line;
	double y, u = 0.0;
	if (!fit_line(g, &line))
		return NAN;
	fl_numeric_line_at(&line, g->numbers[1] - g->numbers[0], &y, &u);
	return u;
}

/* Columns x, y, u. */
static bool fit_weighted(const given *g, fl_line *line) {
	return fl_numeric_line_weighted(g->columns[0], g->columns[1], g->columns[2], g->rows, line, NULL) == FL_OK;
}

LINE_FIELD(weighted_intercept, fit_weighted, line.intercept)
LINE_FIELD(weighted_slope, fit_weighted, line.slope)
LINE_FIELD(weighted_u_intercept, fit_weighted, sqrt(line.var_intercept))
LINE_FIELD(weighted_u_slope, fit_weighted, sqrt(line.var_slope))
LINE_FIELD(weighted_cov, fit_weighted, line.cov)
LINE_FIELD(weighted_sum_sq, fit_weighted, line.sum_sq)
LINE_FIELD(weighted_dof, fit_weighted, (double)line.dof)

/* Range calibration: a line through the first and last row only (columns indication, reference). Numbers: relative
 * standard uncertainty of the reference, half-width of the indication's resolution. */
static bool fit_two_points(const given *g, fl_line *line) {
	size_t last = g->rows - 1;
	const double x[] = {g->columns[0][0], g->columns[0][last]}, y[] = {g->columns[1][0], g->columns[1][last]};
	if (fl_numeric_line(x, y, 2, line, NULL) != FL_OK)
		return false;
	double resolution = line->slope * g->numbers[1] / sqrt(3.0);
	const double u[] = {hypot(g->numbers[0] * y[0], resolution), hypot(g->numbers[0] * y[1], resolution)};
	return fl_numeric_line_weighted(x, y, u, 2, line, NULL) == FL_OK;
}

LINE_FIELD(two_point_intercept, fit_two_points, line.intercept)
LINE_FIELD(two_point_slope, fit_two_points, line.slope)
LINE_FIELD(two_point_u_intercept, fit_two_points, sqrt(line.var_intercept))
LINE_FIELD(two_point_u_slope, fit_two_points, sqrt(line.var_slope))
LINE_FIELD(two_point_correlation, fit_two_points, line.cov / sqrt(line.var_intercept * line.var_slope))

/* ---- general least squares ---- */

typedef struct general_fit {
	double c[MAX_COLUMNS], covariance[MAX_COLUMNS * MAX_COLUMNS], s, sum_sq;
	size_t p;
} general_fit;

/* Columns x, y. Numbers: lowest power, highest power, [the power asked for]. */
static bool fit_polynomial(const given *g, general_fit *fit) {
	static double X[MAX_ROWS * MAX_COLUMNS];
	size_t lowest = (size_t)g->numbers[0], highest = (size_t)g->numbers[1];
	fit->p = highest - lowest + 1;
	if (highest < lowest || fit->p > MAX_COLUMNS)
		return false;
	for (size_t i = 0; i < g->rows; i++)
		for (size_t j = 0; j < fit->p; j++)
			X[i * fit->p + j] = pow(g->columns[0][i], (double)(lowest + j));
	return fl_numeric_least_squares(X, g->columns[1], g->rows, fit->p, fit->c, fit->covariance, &fit->s, &fit->sum_sq,
	                                NULL) == FL_OK;
}

static size_t power_asked(const given *g) {
	return (size_t)(g->numbers[2] - g->numbers[0]);
}

static double polynomial_c(const given *g) {
	general_fit fit;
	return fit_polynomial(g, &fit) && power_asked(g) < fit.p ? fit.c[power_asked(g)] : NAN;
}

static double polynomial_u(const given *g) {
	general_fit fit;
	size_t j = power_asked(g);
	return fit_polynomial(g, &fit) && j < fit.p ? sqrt(fit.covariance[j * fit.p + j]) : NAN;
}

static double polynomial_s(const given *g) {
	general_fit fit;
	return fit_polynomial(g, &fit) ? fit.s : NAN;
}

static double polynomial_sum_sq(const given *g) {
	general_fit fit;
	return fit_polynomial(g, &fit) ? fit.sum_sq : NAN;
}

/* Columns y, x1, x2, ...; a constant stands before them. The number is the coefficient asked for. */
static bool fit_multiple(const given *g, general_fit *fit) {
	static double X[MAX_ROWS * MAX_COLUMNS];
	fit->p = g->column_count;
	for (size_t i = 0; i < g->rows; i++)
		for (size_t j = 0; j < fit->p; j++)
			X[i * fit->p + j] = j == 0 ? 1.0 : g->columns[j][i];
	return fl_numeric_least_squares(X, g->columns[0], g->rows, fit->p, fit->c, fit->covariance, &fit->s, &fit->sum_sq,
	                                NULL) == FL_OK;
}

static double multiple_c(const given *g) {
	general_fit fit;
	size_t j = (size_t)g->numbers[0];
	return fit_multiple(g, &fit) && j < fit.p ? fit.c[j] : NAN;
}

static double multiple_u(const given *g) {
	general_fit fit;
	size_t j = (size_t)g->numbers[0];
	return fit_multiple(g, &fit) && j < fit.p ? sqrt(fit.covariance[j * fit.p + j]) : NAN;
}

static double multiple_s(const given *g) {
	general_fit fit;
	return fit_multiple(g, &fit) ? fit.s : NAN;
}

/* ---- traverses: columns input, then up and down of each cycle in turn; an empty cell was not measured ---- */

/* The readings of one direction at one row: 1 is up, 2 is down. Returns how many there are. */
static size_t one_direction(const given *g, size_t row, size_t direction, double *v) {
	size_t n = 0;
	for (size_t column = direction; column < g->column_count; column += 2)
		if (!isnan(g->columns[column][row]))
			v[n++] = g->columns[column][row];
	return n;
}

static bool all_errors(const given *g, fl_spread *spread) {
	double v[MAX_ROWS * 2];
	size_t n = 0;
	for (size_t row = 0; row < g->rows && row < MAX_ROWS / 4; row++)
		for (size_t direction = 1; direction <= 2; direction++)
			n += one_direction(g, row, direction, v + n);
	return fl_numeric_spread(v, n, spread, NULL) == FL_OK;
}

static double traverses_highest(const given *g) {
	fl_spread spread = {0};
	return all_errors(g, &spread) ? spread.max : NAN;
}

static double traverses_lowest(const given *g) {
	fl_spread spread = {0};
	return all_errors(g, &spread) ? spread.min : NAN;
}

static double traverses_hysteresis(const given *g) {
	double largest = NAN, gap;
	size_t at;
	for (size_t up = 1; up + 1 < g->column_count; up += 2)
		if (fl_numeric_largest_gap(g->columns[up], g->columns[up + 1], g->rows, &gap, &at, NULL) == FL_OK)
			largest = fmax(largest, gap);
	return largest;
}

static double traverses_repeatability(const given *g) {
	double largest = NAN, v[MAX_COLUMNS];
	fl_spread spread = {0};
	for (size_t row = 0; row < g->rows; row++)
		for (size_t direction = 1; direction <= 2; direction++)
			if (fl_numeric_spread(v, one_direction(g, row, direction, v), &spread, NULL) == FL_OK)
				largest = fmax(largest, spread.max - spread.min);
	return largest;
}

/* Mean of the up mean and the down mean; where only one direction was measured, that one's. */
static void average_errors(const given *g, double *average) {
	for (size_t row = 0; row < g->rows; row++) {
		double v[MAX_COLUMNS], means[2];
		size_t n = 0;
		fl_spread spread = {0};
		for (size_t direction = 1; direction <= 2; direction++)
			if (fl_numeric_spread(v, one_direction(g, row, direction, v), &spread, NULL) == FL_OK)
				means[n++] = spread.mean;
		average[row] = fl_numeric_spread(means, n, &spread, NULL) == FL_OK ? spread.mean : NAN;
	}
}

typedef fl_status (*reference_line)(const double *, const double *, size_t, fl_reference_line *, fl_error *);

static fl_reference_line of_averages(const given *g, reference_line fit) {
	double average[MAX_ROWS];
	fl_reference_line line = {NAN, NAN, NAN, 0};
	average_errors(g, average);
	return fit(g->columns[0], average, g->rows, &line, NULL) == FL_OK ? line : (fl_reference_line){NAN, NAN, NAN, 0};
}

static double traverses_independent(const given *g) {
	return of_averages(g, fl_numeric_line_independent).max_abs;
}

static double traverses_independent_intercept(const given *g) {
	return of_averages(g, fl_numeric_line_independent).intercept;
}

static double traverses_independent_slope(const given *g) {
	return of_averages(g, fl_numeric_line_independent).slope;
}

static double traverses_terminal(const given *g) {
	return of_averages(g, fl_numeric_line_terminal).max_abs;
}

static double traverses_zero_based(const given *g) {
	return of_averages(g, fl_numeric_line_zero_based).max_abs;
}

/* Columns a, b. */
static double gap_largest(const given *g) {
	double gap = 0.0;
	size_t at;
	return fl_numeric_largest_gap(g->columns[0], g->columns[1], g->rows, &gap, &at, NULL) == FL_OK ? gap : NAN;
}

/* Columns x, y. */
static double linearity_terminal(const given *g) {
	fl_reference_line line = {0};
	return fl_numeric_line_terminal(g->columns[0], g->columns[1], g->rows, &line, NULL) == FL_OK ? line.max_abs : NAN;
}

/* ---- quantiles and budgets ---- */

static double student(const given *g) {
	return fl_numeric_student(g->numbers[0], g->numbers[1]);
}

static double normal_cdf(const given *g) {
	return fl_numeric_normal_cdf(g->numbers[0]);
}

static double normal_quantile(const given *g) {
	return fl_numeric_normal_quantile(g->numbers[0]);
}

/* Numbers: coverage probability, then standard uncertainty, sensitivity and degrees of freedom of each term. */
static fl_budget_sum add_budget(const given *g) {
	fl_budget_term terms[MAX_NUMBERS / 3];
	size_t n = (g->number_count - 1) / 3;
	for (size_t i = 0; i < n; i++)
		terms[i] = (fl_budget_term){g->numbers[3 * i + 1], g->numbers[3 * i + 2], g->numbers[3 * i + 3]};
	fl_budget_sum sum = {NAN, NAN, NAN, NAN};
	return fl_numeric_budget(terms, n, g->numbers[0], &sum, NULL) == FL_OK ? sum : (fl_budget_sum){NAN, NAN, NAN, NAN};
}

static double budget_uc(const given *g) {
	return add_budget(g).uc;
}

static double budget_dof(const given *g) {
	return add_budget(g).dof_effective;
}

static double budget_k(const given *g) {
	return add_budget(g).coverage_factor;
}

static double budget_expanded(const given *g) {
	return add_budget(g).expanded;
}

/* ---- oils ---- */

static double d341_z(const given *g) {
	double z;
	return fl_physics_d341_z(g->numbers[0] * 1e-6, &z, NULL) == FL_OK ? z : NAN;
}

static double d341_nu(const given *g) {
	double nu;
	return fl_physics_d341_nu(g->numbers[0], &nu, NULL) == FL_OK ? nu * 1e6 : NAN;
}

static double d341_round_trip(const given *g) {
	double z, nu;
	if (fl_physics_d341_z(g->numbers[0] * 1e-6, &z, NULL) != FL_OK)
		return NAN;
	return fl_physics_d341_nu(z, &nu, NULL) == FL_OK ? nu * 1e6 : NAN;
}

/* Numbers: temperature, viscosity, temperature, viscosity [, temperature asked for]. */
static fl_d341_line two_point_oil(const given *g) {
	const double *v = g->numbers;
	fl_d341_line line = {NAN, NAN};
	if (fl_physics_d341_line(v[0], v[1] * 1e-6, v[2], v[3] * 1e-6, &line, NULL) != FL_OK)
		return (fl_d341_line){NAN, NAN};
	return line;
}

static double d341_a(const given *g) {
	return two_point_oil(g).a;
}

static double d341_b(const given *g) {
	return two_point_oil(g).b;
}

static double d341_at(const given *g) {
	fl_d341_line line = two_point_oil(g);
	double nu;
	return !isnan(line.a) && fl_physics_d341_at(&line, g->numbers[4], &nu, NULL) == FL_OK ? nu * 1e6 : NAN;
}

/* Numbers: temperature, viscosity, density, temperature, viscosity, density, temperature asked for. */
static double oil_mu(const given *g) {
	const double *v = g->numbers;
	const fl_oil_point points[] = {{v[0], v[1] * 1e-6, 0.0, v[2], 0.0}, {v[3], v[4] * 1e-6, 0.0, v[5], 0.0}};
	const fl_oil_table table = {points, 2};
	fl_oil_state oil = {0};
	return fl_physics_oil_at(&table, v[6], &oil, NULL) == FL_OK ? oil.mu_pa_s * 1e3 : NAN;
}

/* ---- seconds ---- */

static double redwood_nu(const given *g) {
	double nu;
	return fl_physics_redwood_to_nu(g->numbers[0], &nu, NULL) == FL_OK ? nu * 1e6 : NAN;
}

static double redwood_seconds(const given *g) {
	double seconds;
	return fl_physics_nu_to_redwood(g->numbers[0] * 1e-6, &seconds, NULL) == FL_OK ? seconds : NAN;
}

/* Numbers: seconds or viscosity, then the temperature in °F. */
static double saybolt_nu_f(const given *g) {
	double nu, temp_c = fl_to_inside(g->numbers[1], FL_U_FAHRENHEIT);
	return fl_physics_saybolt_to_nu(g->numbers[0], temp_c, &nu, NULL) == FL_OK ? nu * 1e6 : NAN;
}

static double saybolt_seconds_f(const given *g) {
	double seconds, temp_c = fl_to_inside(g->numbers[1], FL_U_FAHRENHEIT);
	return fl_physics_nu_to_saybolt(g->numbers[0] * 1e-6, temp_c, &seconds, NULL) == FL_OK ? seconds : NAN;
}

static double saybolt_ratio_f(const given *g) {
	return saybolt_seconds_f(g) / g->numbers[0];
}

/* ---- signals ---- */

/* What a correct instrument puts out at a fraction of its range. */
static double output_at(fl_signal signal, double x) {
	const fl_scale scale = {FL_DIAL_MM2_S, 0.0, 50.0, 900.0, 0.0, signal};
	fl_ideal ideal = {0};
	return fl_physics_ideal(&scale, x * 50e-6 * 900.0, &ideal, NULL) == FL_OK ? ideal.output : NAN;
}

static double current_output(const given *g) {
	return output_at(FL_SIGNAL_4_20_MA, g->numbers[0]);
}

static double bar_output_kpa(const given *g) {
	return fl_to_inside(output_at(FL_SIGNAL_02_1_BAR, g->numbers[0]), FL_U_BAR) / 1e3;
}

static double psi_output(const given *g) {
	return output_at(FL_SIGNAL_3_15_PSI, g->numbers[0]);
}

static double psi_output_kpa(const given *g) {
	return fl_to_inside(output_at(FL_SIGNAL_3_15_PSI, g->numbers[0]), FL_U_PSI) / 1e3;
}

/* Returns 0 measuring, 1 saturated, 2 failure. */
static double current_state(const given *g) {
	return (double)fl_physics_signal_state(FL_SIGNAL_4_20_MA, g->numbers[0]);
}

/* ---- flow ---- */

/* Numbers: bore m, pressure drop Pa/m, flow m³/s. Returns Pa·s. */
static double poiseuille_mu(const given *g) {
	return fl_physics_poiseuille_mu(g->numbers[0], g->numbers[1], g->numbers[2]);
}

static fl_flow flow_through(double bore_m, double flow_m3_s, double mu_pa_s, double rho_kg_m3) {
	const fl_capillary tube = {bore_m, 1.0, flow_m3_s, 1.0, 0.0, 0.0, 0.0};
	fl_flow flow = {0};
	return fl_physics_capillary(&tube, mu_pa_s, rho_kg_m3, &flow, NULL) == FL_OK ? flow
	                                                                             : (fl_flow){.velocity_m_s = NAN};
}

/* Numbers: bore m, flow m³/s, viscosity Pa·s. */
static double tube_velocity(const given *g) {
	return flow_through(g->numbers[0], g->numbers[1], g->numbers[2], 900.0).velocity_m_s;
}

static double tube_pressure_per_m(const given *g) {
	return flow_through(g->numbers[0], g->numbers[1], g->numbers[2], 900.0).dp_total_pa;
}

static double tube_wall_stress(const given *g) {
	return g->numbers[2] * flow_through(g->numbers[0], g->numbers[1], g->numbers[2], 900.0).wall_shear_per_s;
}

/* Number: Reynolds number. Returns the entrance length over the bore. */
static double tube_entrance_bores(const given *g) {
	const double bore_m = 2.2e-3, flow_m3_s = 1e-6, rho_kg_m3 = 900.0;
	double velocity_m_s = flow_through(bore_m, flow_m3_s, 1.0, rho_kg_m3).velocity_m_s;
	double mu_pa_s = rho_kg_m3 * velocity_m_s * bore_m / g->numbers[0];
	return flow_through(bore_m, flow_m3_s, mu_pa_s, rho_kg_m3).entrance_m / bore_m;
}

/* Name, function, numbers from and to, columns from and to. */
static const published_function functions[] = {
    {"line.intercept", line_intercept, 0, 1, 2, 2},
    {"line.slope", line_slope, 0, 1, 2, 2},
    {"line.u_intercept", line_u_intercept, 0, 1, 2, 2},
    {"line.u_slope", line_u_slope, 0, 1, 2, 2},
    {"line.cov", line_cov, 0, 1, 2, 2},
    {"line.correlation", line_correlation, 0, 1, 2, 2},
    {"line.s", line_s, 0, 1, 2, 2},
    {"line.sum_sq", line_sum_sq, 0, 1, 2, 2},
    {"line.dof", line_dof, 0, 1, 2, 2},
    {"line.at", line_at, 2, 2, 2, 2},
    {"line.u_at", line_u_at, 2, 2, 2, 2},
    {"weighted.intercept", weighted_intercept, 0, 0, 3, 3},
    {"weighted.slope", weighted_slope, 0, 0, 3, 3},
    {"weighted.u_intercept", weighted_u_intercept, 0, 0, 3, 3},
    {"weighted.u_slope", weighted_u_slope, 0, 0, 3, 3},
    {"weighted.cov", weighted_cov, 0, 0, 3, 3},
    {"weighted.sum_sq", weighted_sum_sq, 0, 0, 3, 3},
    {"weighted.dof", weighted_dof, 0, 0, 3, 3},
    {"two_point.intercept", two_point_intercept, 2, 2, 2, 2},
    {"two_point.slope", two_point_slope, 2, 2, 2, 2},
    {"two_point.u_intercept", two_point_u_intercept, 2, 2, 2, 2},
    {"two_point.u_slope", two_point_u_slope, 2, 2, 2, 2},
    {"two_point.correlation", two_point_correlation, 2, 2, 2, 2},
    {"polynomial.c", polynomial_c, 3, 3, 2, 2},
    {"polynomial.u", polynomial_u, 3, 3, 2, 2},
    {"polynomial.s", polynomial_s, 2, 2, 2, 2},
    {"polynomial.sum_sq", polynomial_sum_sq, 2, 2, 2, 2},
    {"multiple.c", multiple_c, 1, 1, 2, MAX_COLUMNS},
    {"multiple.u", multiple_u, 1, 1, 2, MAX_COLUMNS},
    {"multiple.s", multiple_s, 0, 0, 2, MAX_COLUMNS},
    {"traverses.highest", traverses_highest, 0, 0, 3, MAX_COLUMNS},
    {"traverses.lowest", traverses_lowest, 0, 0, 3, MAX_COLUMNS},
    {"traverses.hysteresis", traverses_hysteresis, 0, 0, 3, MAX_COLUMNS},
    {"traverses.repeatability", traverses_repeatability, 0, 0, 3, MAX_COLUMNS},
    {"traverses.independent", traverses_independent, 0, 0, 3, MAX_COLUMNS},
    {"traverses.independent_intercept", traverses_independent_intercept, 0, 0, 3, MAX_COLUMNS},
    {"traverses.independent_slope", traverses_independent_slope, 0, 0, 3, MAX_COLUMNS},
    {"traverses.terminal", traverses_terminal, 0, 0, 3, MAX_COLUMNS},
    {"traverses.zero_based", traverses_zero_based, 0, 0, 3, MAX_COLUMNS},
    {"gap.largest", gap_largest, 0, 0, 2, 2},
    {"linearity.terminal", linearity_terminal, 0, 0, 2, 2},
    {"student", student, 2, 2, 0, 0},
    {"normal.cdf", normal_cdf, 1, 1, 0, 0},
    {"normal.quantile", normal_quantile, 1, 1, 0, 0},
    {"budget.uc", budget_uc, 4, MAX_NUMBERS, 0, 0},
    {"budget.dof", budget_dof, 4, MAX_NUMBERS, 0, 0},
    {"budget.k", budget_k, 4, MAX_NUMBERS, 0, 0},
    {"budget.expanded", budget_expanded, 4, MAX_NUMBERS, 0, 0},
    {"d341.z", d341_z, 1, 1, 0, 0},
    {"d341.nu", d341_nu, 1, 1, 0, 0},
    {"d341.round_trip", d341_round_trip, 1, 1, 0, 0},
    {"d341.a", d341_a, 4, 4, 0, 0},
    {"d341.b", d341_b, 4, 4, 0, 0},
    {"d341.at", d341_at, 5, 5, 0, 0},
    {"oil.mu", oil_mu, 7, 7, 0, 0},
    {"redwood.nu", redwood_nu, 1, 1, 0, 0},
    {"redwood.seconds", redwood_seconds, 1, 1, 0, 0},
    {"saybolt.nu_f", saybolt_nu_f, 2, 2, 0, 0},
    {"saybolt.seconds_f", saybolt_seconds_f, 2, 2, 0, 0},
    {"saybolt.ratio_f", saybolt_ratio_f, 2, 2, 0, 0},
    {"current.output", current_output, 1, 1, 0, 0},
    {"current.state", current_state, 1, 1, 0, 0},
    {"bar.output_kpa", bar_output_kpa, 1, 1, 0, 0},
    {"psi.output", psi_output, 1, 1, 0, 0},
    {"psi.output_kpa", psi_output_kpa, 1, 1, 0, 0},
    {"poiseuille.mu", poiseuille_mu, 3, 3, 0, 0},
    {"tube.velocity", tube_velocity, 3, 3, 0, 0},
    {"tube.pressure_per_m", tube_pressure_per_m, 3, 3, 0, 0},
    {"tube.wall_stress", tube_wall_stress, 3, 3, 0, 0},
    {"tube.entrance_bores", tube_entrance_bores, 1, 1, 0, 0},
};

const published_function *find_function(const char *name) {
	for (size_t i = 0; i < sizeof functions / sizeof *functions; i++)
		if (strcmp(functions[i].name, name) == 0)
			return &functions[i];
	return find_uncertainty_function(name);
}
