/* Ten nonlinear regression problems with certified parameters, standard deviations and residual sums of squares.
 * Source of all figures: National Institute of Standards and Technology, Statistical Reference Datasets, nonlinear
 * regression (levels of difficulty as given there).  Written down from memory; that the certified sum of squares comes
 * out of data and parameters to all its digits (checked in the test) proves the copy.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_NIST_REGRESSION_H
#define TESTS_NIST_REGRESSION_H

#include <math.h>
#include <stddef.h>

enum { NIST_PARAMETERS_MOST = 7 };

typedef struct {
    const char *name;
    const char *level;
    size_t n, p;
    const double *x, *y;
    double (*model)(const double *b, double x);
    double start[2][NIST_PARAMETERS_MOST];
    double certified[NIST_PARAMETERS_MOST];
    double deviation[NIST_PARAMETERS_MOST]; /* certified standard deviations of the estimates */
    double sum_of_squares;
} nist_problem;

static const double misra_x[] = {77.6,  114.9, 141.1, 190.8, 239.9, 289.0, 332.8,
                                 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0};
static const double misra_y[] = {10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02,
                                 44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78};

static double misra1c(const double *b, double x) {
    return b[0] * (1.0 - 1.0 / sqrt(1.0 + 2.0 * b[1] * x));
}
static double misra1d(const double *b, double x) {
    return b[0] * b[1] * x / (1.0 + b[1] * x);
}

static const double mgh09_x[] = {4.0, 2.0, 1.0, 0.5, 0.25, 0.167, 0.125, 0.1, 0.0833, 0.0714, 0.0625};
static const double mgh09_y[] = {0.1957, 0.1947, 0.1735, 0.1600, 0.0844, 0.0627,
                                 0.0456, 0.0342, 0.0323, 0.0235, 0.0246};
static double mgh09(const double *b, double x) {
    return b[0] * (x * x + x * b[1]) / (x * x + x * b[2] + b[3]);
}

static const double mgh10_x[] = {50, 55, 60, 65, 70, 75, 80, 85, 90, 95, 100, 105, 110, 115, 120, 125};
static const double mgh10_y[] = {34780, 28610, 23650, 19630, 16370, 13720, 11540, 9744,
                                 8261,  7030,  6005,  5147,  4427,  3820,  3307,  2872};
static double mgh10(const double *b, double x) {
    return b[0] * exp(b[1] / (x + b[2]));
}

static const double mgh17_x[] = {0,   10,  20,  30,  40,  50,  60,  70,  80,  90,  100, 110, 120, 130, 140, 150, 160,
                                 170, 180, 190, 200, 210, 220, 230, 240, 250, 260, 270, 280, 290, 300, 310, 320};
static const double mgh17_y[] = {0.844, 0.908, 0.932, 0.936, 0.925, 0.908, 0.881, 0.850, 0.818, 0.784, 0.751,
                                 0.718, 0.685, 0.658, 0.628, 0.603, 0.580, 0.558, 0.538, 0.522, 0.506, 0.490,
                                 0.478, 0.467, 0.457, 0.448, 0.438, 0.431, 0.424, 0.420, 0.414, 0.411, 0.406};
static double mgh17(const double *b, double x) {
    return b[0] + b[1] * exp(-x * b[3]) + b[2] * exp(-x * b[4]);
}

static const double boxbod_x[] = {1, 2, 3, 5, 7, 10};
static const double boxbod_y[] = {109, 149, 149, 191, 213, 224};
static double boxbod(const double *b, double x) {
    return b[0] * (1.0 - exp(-b[1] * x));
}

static const double rat42_x[] = {9, 14, 21, 28, 42, 57, 63, 70, 79};
static const double rat42_y[] = {8.930, 10.800, 18.590, 22.330, 39.350, 56.110, 61.730, 64.620, 67.080};
static double rat42(const double *b, double x) {
    return b[0] / (1.0 + exp(b[1] - b[2] * x));
}

static const double rat43_x[] = {1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15};
static const double rat43_y[] = {16.08,  33.83,  65.80,  97.20,  191.55, 326.20, 386.87, 520.53,
                                 590.03, 651.92, 724.93, 699.56, 689.96, 637.56, 717.41};
static double rat43(const double *b, double x) {
    return b[0] / pow(1.0 + exp(b[1] - b[2] * x), 1.0 / b[3]);
}

static const double eckerle4_x[] = {400.0, 405.0, 410.0, 415.0, 420.0, 425.0, 430.0, 435.0, 436.5, 438.0, 439.5, 441.0,
                                    442.5, 444.0, 445.5, 447.0, 448.5, 450.0, 451.5, 453.0, 454.5, 456.0, 457.5, 459.0,
                                    460.5, 462.0, 463.5, 465.0, 470.0, 475.0, 480.0, 485.0, 490.0, 495.0, 500.0};
static const double eckerle4_y[] = {0.0001575, 0.0001699, 0.0002350, 0.0003102, 0.0004917, 0.0008710, 0.0017418,
                                    0.0046400, 0.0065895, 0.0097302, 0.0149002, 0.0237310, 0.0401683, 0.0712559,
                                    0.1264458, 0.2073413, 0.2902366, 0.3445623, 0.3698049, 0.3668534, 0.3106727,
                                    0.2078154, 0.1164354, 0.0616764, 0.0337200, 0.0194023, 0.0117831, 0.0074357,
                                    0.0022732, 0.0008800, 0.0004579, 0.0002345, 0.0001586, 0.0001143, 0.0000710};
static double eckerle4(const double *b, double x) {
    const double from_middle = (x - b[2]) / b[1];
    return b[0] / b[1] * exp(-0.5 * from_middle * from_middle);
}

static const double thurber_x[] = {-3.067, -2.981, -2.921, -2.912, -2.840, -2.797, -2.702, -2.699, -2.633, -2.481,
                                   -2.363, -2.322, -1.501, -1.460, -1.274, -1.212, -1.100, -1.046, -0.915, -0.714,
                                   -0.566, -0.545, -0.400, -0.309, -0.109, -0.103, 0.010,  0.119,  0.377,  0.790,
                                   0.963,  1.006,  1.115,  1.572,  1.841,  2.047,  2.200};
static const double thurber_y[] = {80.574,   84.248,   87.264,   87.195,   89.076,   89.608,   89.868,   90.101,
                                   92.405,   95.854,   100.696,  101.060,  401.672,  390.724,  567.534,  635.316,
                                   733.054,  759.087,  894.206,  990.785,  1090.109, 1080.914, 1122.643, 1178.351,
                                   1260.531, 1273.514, 1288.339, 1327.543, 1353.863, 1414.509, 1425.208, 1421.384,
                                   1442.962, 1464.350, 1468.705, 1447.894, 1457.628};
static double thurber(const double *b, double x) {
    return (b[0] + x * (b[1] + x * (b[2] + x * b[3]))) / (1.0 + x * (b[4] + x * (b[5] + x * b[6])));
}

#define NIST_DATA(set) sizeof(set##_x) / sizeof(set##_x)[0]

static const nist_problem nist_problems[] = {
    {.name = "Misra1c",
     .level = "average",
     .n = NIST_DATA(misra),
     .p = 2,
     .x = misra_x,
     .y = misra_y,
     .model = misra1c,
     .start = {{500, 0.0001}, {600, 0.0002}},
     .certified = {6.3642725809E+02, 2.0813627256E-04},
     .deviation = {4.6638326572E+00, 1.7728423155E-06},
     .sum_of_squares = 4.0966836971E-02},
    {.name = "Misra1d",
     .level = "average",
     .n = NIST_DATA(misra),
     .p = 2,
     .x = misra_x,
     .y = misra_y,
     .model = misra1d,
     .start = {{500, 0.0001}, {450, 0.0003}},
     .certified = {4.3736970754E+02, 3.0227324449E-04},
     .deviation = {3.6489174345E+00, 2.9334354479E-06},
     .sum_of_squares = 5.6419295283E-02},
    {.name = "MGH17",
     .level = "average",
     .n = NIST_DATA(mgh17),
     .p = 5,
     .x = mgh17_x,
     .y = mgh17_y,
     .model = mgh17,
     .start = {{50, 150, -100, 1, 2}, {0.5, 1.5, -1, 0.01, 0.02}},
     .certified = {3.7541005211E-01, 1.9358469127E+00, -1.4646871366E+00, 1.2867534640E-02, 2.2122699662E-02},
     .deviation = {2.0723153551E-03, 2.2031669222E-01, 2.2175707739E-01, 4.4861358114E-04, 8.9471996575E-04},
     .sum_of_squares = 5.4648946975E-05},
    {.name = "MGH09",
     .level = "higher",
     .n = NIST_DATA(mgh09),
     .p = 4,
     .x = mgh09_x,
     .y = mgh09_y,
     .model = mgh09,
     .start = {{25, 39, 41.5, 39}, {0.25, 0.39, 0.415, 0.39}},
     .certified = {1.9280693458E-01, 1.9128232873E-01, 1.2305650693E-01, 1.3606233068E-01},
     .deviation = {1.1435312227E-02, 1.9633220911E-01, 8.0842031232E-02, 9.0025542308E-02},
     .sum_of_squares = 3.0750560385E-04},
    {.name = "MGH10",
     .level = "higher",
     .n = NIST_DATA(mgh10),
     .p = 3,
     .x = mgh10_x,
     .y = mgh10_y,
     .model = mgh10,
     .start = {{2, 400000, 25000}, {0.02, 4000, 250}},
     .certified = {5.6096364710E-03, 6.1813463463E+03, 3.4522363462E+02},
     .deviation = {1.5687892471E-04, 2.3309021107E+01, 7.8486103508E-01},
     .sum_of_squares = 8.7945855171E+01},
    {.name = "BoxBOD",
     .level = "higher",
     .n = NIST_DATA(boxbod),
     .p = 2,
     .x = boxbod_x,
     .y = boxbod_y,
     .model = boxbod,
     .start = {{1, 1}, {100, 0.75}},
     .certified = {2.1380940889E+02, 5.4723748542E-01},
     .deviation = {1.2354515176E+01, 1.0455993237E-01},
     .sum_of_squares = 1.1680088766E+03},
    {.name = "Rat42",
     .level = "higher",
     .n = NIST_DATA(rat42),
     .p = 3,
     .x = rat42_x,
     .y = rat42_y,
     .model = rat42,
     .start = {{100, 1, 0.1}, {75, 2.5, 0.07}},
     .certified = {7.2462237576E+01, 2.6180768402E+00, 6.7359200066E-02},
     .deviation = {1.7340283401E+00, 8.8295217536E-02, 3.4465663377E-03},
     .sum_of_squares = 8.0565229338E+00},
    {.name = "Rat43",
     .level = "higher",
     .n = NIST_DATA(rat43),
     .p = 4,
     .x = rat43_x,
     .y = rat43_y,
     .model = rat43,
     .start = {{100, 10, 1, 1}, {700, 5, 0.75, 1.3}},
     .certified = {6.9964151270E+02, 5.2771253025E+00, 7.5962938329E-01, 1.2792483859E+00},
     .deviation = {1.6302297817E+01, 2.0828735829E+00, 1.9566123451E-01, 6.8761936385E-01},
     .sum_of_squares = 8.7864049080E+03},
    {.name = "Eckerle4",
     .level = "higher",
     .n = NIST_DATA(eckerle4),
     .p = 3,
     .x = eckerle4_x,
     .y = eckerle4_y,
     .model = eckerle4,
     .start = {{1, 10, 500}, {1.5, 5, 450}},
     .certified = {1.5543827178E+00, 4.0888321754E+00, 4.5154121844E+02},
     .deviation = {1.5408051163E-02, 4.6803020753E-02, 4.6800518816E-02},
     .sum_of_squares = 1.4635887487E-03},
    {.name = "Thurber",
     .level = "higher",
     .n = NIST_DATA(thurber),
     .p = 7,
     .x = thurber_x,
     .y = thurber_y,
     .model = thurber,
     .start = {{1000, 1000, 400, 40, 0.7, 0.3, 0.03}, {1300, 1500, 500, 75, 1, 0.4, 0.05}},
     .certified = {1.2881396800E+03, 1.4910792535E+03, 5.8323836877E+02, 7.5416644291E+01, 9.6629502864E-01,
                   3.9797285797E-01, 4.9727297349E-02},
     .deviation = {4.6647963344E+00, 3.9571156086E+01, 2.8698696102E+01, 5.5675370270E+00, 3.1333340687E-02,
                   1.4984928198E-02, 6.5842344623E-03},
     .sum_of_squares = 5.6427082397E+03},
};

#endif
