/* main.c - hands over to the command line.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli.h"

int main(int argc, char **argv) {
	return fl_cli_main(argc, argv);
}
