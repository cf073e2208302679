/* questions.c - what is asked about an oil, an equipment, an instrument, in the order in which the files are read: so
 * the first error of the reader concerns the latest answer, or one before it. SPDX-License-Identifier: GPL-3.0-or-later
 */
#include "shelf_private.h"

static const fl_shelf_question oil[] = {
    {"", "name", "Name of the oil", "As on the bottle's label, such as LK-10.", "", true, false, false, FL_ASK_NEW},
    {"", "lot", "Lot on the bottle", "The lot or batch number of the bottle in your hand, not of the certificate.", "",
     true, false, false, FL_ASK_NEW},
    {"", "certificate", "Number of the certificate", "", "", true, true, false, FL_ASK_ALWAYS},
    {"", "issuer", "Who issued the certificate", "", "", true, false, false, FL_ASK_ALWAYS},
    {"", "certificate lot", "Lot on the certificate",
     "As the certificate names it: it has to be the bottle's, or the certificate belongs to another bottle.", "", true,
     true, false, FL_ASK_ALWAYS},
    {"", "certified on", "Day of certification, year-month-day", "", "", true, true, false, FL_ASK_ALWAYS},
    {"", "use before", "Use before, year-month-day", "The first day on which the oil may not be used any more.", "",
     true, true, false, FL_ASK_ALWAYS},
    {"", "opened on", "Opened on, year-month-day (empty while closed)", "", "", false, false, false, FL_ASK_ALWAYS},
    {"", "k", "Coverage factor k of every U",
     "As the certificate states it, usually 2. U means nothing without it, so it is never guessed.", "", true, true,
     false, FL_ASK_ALWAYS},
    {"table", "at", "Certified temperature", "From cold to warm. An empty line ends the table.", "°C", true, false,
     false, FL_ASK_ALWAYS},
    {"table", "nu", "Kinematic viscosity", "The column in mm²/s (cSt), not the one in mPa·s.", "mm²/s", true, true,
     false, FL_ASK_ALWAYS},
    {"table", "U", "Expanded uncertainty of the viscosity", "In % of it, or in mm²/s.", "%", true, false, true,
     FL_ASK_ALWAYS},
    {"table", "density", "Density", "", "kg/m³", true, true, false, FL_ASK_ALWAYS},
    {"table", "U density", "Expanded uncertainty of the density", "", "kg/m³", true, false, true, FL_ASK_ALWAYS},
    {"table", "mu", "Dynamic viscosity, if the certificate has it",
     "It has to be viscosity times density: this finds swapped columns and slips of the pen.", "mPa·s", false, true,
     false, FL_ASK_ALWAYS},
    {0}};

static const fl_shelf_question equipment[] = {
    {"", "id", "Its id on board", "As it is marked, such as TH-7.", "", true, false, false, FL_ASK_NEW},
    {"", "role", "What it is",
     "thermometer, current meter, pressure gauge, bath, tachometer, pressure standard or timer. A pressure gauge reads "
     "a "
     "pneumatic output, a pressure standard injects a differential pressure.",
     "", true, false, false, FL_ASK_NEW},
    {"", "certificate", "Number of the certificate", "", "", true, true, false, FL_ASK_ALWAYS},
    {"", "issuer", "Who issued the certificate", "", "", true, false, false, FL_ASK_ALWAYS},
    {"", "calibrated on", "Day of its calibration, year-month-day", "", "", true, true, false, FL_ASK_ALWAYS},
    {"", "due on", "Due on, year-month-day", "On this day it may be used still.", "", true, true, false, FL_ASK_ALWAYS},
    {"", "range", "Range with unit, such as 0 to 150 °C", "", "", true, false, false, FL_ASK_ALWAYS},
    {"", "resolution", "Resolution with unit, such as 0.01 K", "The last digit shown. Temperatures differ in K.",
     "@range", true, false, false, FL_ASK_ALWAYS},
    {"", "drift per year", "Drift in a year with unit, half width",
     "From its history; 0 with the unit if it has none. Two certificates tell it: the change over the years between.",
     "@range", true, false, false, FL_ASK_NO_BATH},
    {"", "uniformity", "Uniformity of the bath, half width in K", "How far its liquid differs from place to place.",
     "K", true, true, false, FL_ASK_BATH},
    {"", "U", "Expanded uncertainty U with unit", "", "@range", true, true, false, FL_ASK_NO_BATH},
    {"", "k", "Its coverage factor k", "As the certificate states it; it is never guessed.", "", true, true, false,
     FL_ASK_NO_BATH},
    {"corrections", "at", "Point of a correction with unit", "From low to high. An empty line ends the list.", "@scale",
     true, true, false, FL_ASK_ALWAYS},
    {"corrections", "add", "To be added to the indication there, with unit",
     "True value minus indication: where a thermometer shows 40.02 °C at 40.00 °C, it is -0.02 K.", "@range", true,
     true, false, FL_ASK_ALWAYS},
    {0}};

static const fl_shelf_question instrument[] = {
    {"", "tag", "Tag", "As on its plate on board, such as VT-1.", "", true, false, false, FL_ASK_NEW},
    {"", "serial", "Serial number", "From the maker's plate.", "", true, false, false, FL_ASK_ALWAYS},
    {"", "since", "From which day on is it so, year-month-day",
     "The description before stays for the sessions before this day.", "", true, true, false, FL_ASK_RENEWED},
    {"", "site", "Ship or site", "", "", false, false, false, FL_ASK_ALWAYS},
    {"", "owner", "Owner", "", "", false, false, false, FL_ASK_ALWAYS},
    {"", "position", "Position", "Such as main engine booster unit, sensor 1.", "", false, false, false, FL_ASK_ALWAYS},
    {"", "maker plate", "What the maker's plate says", "", "", false, false, false, FL_ASK_ALWAYS},
    {"", "dial", "Dial with unit, such as 0 to 50 mm²/s",
     "In mm²/s, mPa·s, s Redwood No. 1 or s Saybolt Universal, as the dial is divided.", "", true, false, false,
     FL_ASK_ALWAYS},
    {"", "dial density", "Density that the dial assumes",
     "The capillary feels mPa·s, so a dial in mm²/s or seconds is right for one density only; from plate or papers.",
     "kg/m³", true, false, false, FL_ASK_DENSITY_DIAL},
    {"", "dial temperature", "Temperature for which the dial is divided", "", "°C", true, false, false, FL_ASK_SAYBOLT},
    {"", "signal", "Signal: 4-20 mA, 0.2-1.0 bar or 3-15 psi", "", "", true, false, false, FL_ASK_ALWAYS},
    {"", "supply", "Supply frequency", "From the plate of the pump's motor.", "Hz", false, false, false, FL_ASK_ALWAYS},
    {"", "motor speed", "Speed of the motor", "", "r/min", false, false, false, FL_ASK_ALWAYS},
    {"", "gear ratio", "Gear ratio, motor over pump", "", "", false, false, false, FL_ASK_ALWAYS},
    {"", "full-scale pressure", "Differential pressure at full scale", "From the plate, with its unit.", "mbar", false,
     false, false, FL_ASK_ALWAYS},
    {"geometry", "bore", "Bore of the capillary (empty: geometry not known)", "The diameter, not the radius.", "mm",
     false, false, false, FL_ASK_ALWAYS},
    {"geometry", "length", "Length of the capillary", "", "mm", true, false, false, FL_ASK_ALWAYS},
    {"geometry", "pump", "Displacement of the pump", "", "cm³/rev", true, false, false, FL_ASK_ALWAYS},
    {"geometry", "pump speed", "Speed of the pump, not of its motor", "", "r/min", true, false, false, FL_ASK_ALWAYS},
    {"geometry", "slip", "Slip of the pump (empty: 0.5 %)", "", "%", false, false, false, FL_ASK_ALWAYS},
    {"", "tolerance", "Tolerance (empty: the procedure's)", "In % of span, % of reading or the dial's unit.",
     "% of span", false, false, false, FL_ASK_ALWAYS},
    {"", "adjust limit", "Adjust limit (empty: the procedure's)", "Inside it the instrument is left alone.",
     "% of span", false, false, false, FL_ASK_ALWAYS},
    {"", "hysteresis limit", "Hysteresis limit (empty: the procedure's)", "", "% of span", false, false, false,
     FL_ASK_ALWAYS},
    {"", "calibration interval", "Agreed calibration interval, such as 12 months", "", "months", false, false, false,
     FL_ASK_ALWAYS},
    {"", "set point", "Set point of the controller, with unit", "", "@dial", false, false, false, FL_ASK_ALWAYS},
    {"", "set point tolerance", "How far the plant lets it be off, with unit", "", "@dial", false, false, false,
     FL_ASK_ALWAYS},
    {"", "alarm low", "Low alarm, with unit", "", "@dial", false, false, false, FL_ASK_ALWAYS},
    {"", "alarm high", "High alarm, with unit", "", "@dial", false, false, false, FL_ASK_ALWAYS},
    {0}};

const fl_shelf_form fl_shelf_forms[FL_SHELF_KINDS] = {
    [FL_SHELF_OIL] = {"oil", "oils", "lot", "certified on", "table", 2, oil},
    [FL_SHELF_EQUIPMENT] = {"equipment", "equipment", "id", "calibrated on", "corrections", 0, equipment},
    [FL_SHELF_INSTRUMENT] = {"instrument", "instruments", "tag", "since", "", 0, instrument},
};

const char *fl_shelf_kind_word(fl_shelf_kind kind) {
	return fl_shelf_forms[kind].word;
}

const char *fl_shelf_kind_list(fl_shelf_kind kind) {
	return fl_shelf_forms[kind].list;
}
