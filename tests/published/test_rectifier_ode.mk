# The general ODE solver that test_rectifier_ode compares with; nothing else needs it.
# SPDX-License-Identifier: GPL-3.0-or-later
$(B)/tests/published/test_rectifier_ode.o: CPPFLAGS += -DWITH_ODE_SOLVER
$(B)/tests/published/test_rectifier_ode: TEST_LIBS += -lsundials_cvode -lsundials_nvecserial \
    -lsundials_sunmatrixdense -lsundials_sunlinsoldense
