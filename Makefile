# platewright: library, command line, tests.  GNU make 3.81 or later.
#
#   make deps demo   install what is needed, build, design the example stage, draw its plots
#   make check       build and run every test
#   make help        the other targets
#
# SPDX-License-Identifier: GPL-3.0-or-later

CC ?= cc
PREFIX ?= /usr/local
B ?= build
VERSION := 0.1.0

PACKAGES := libxml-2.0 gsl jansson
PKG_CONFIG ?= pkg-config
# The libraries are asked for only once they may be there: `make deps` must work without pkg-config.
PACKAGE_CFLAGS = $(shell $(PKG_CONFIG) --cflags $(PACKAGES) | sed 's/-I/-isystem /g')
PACKAGE_LIBS = $(shell $(PKG_CONFIG) --libs $(PACKAGES))

WARN := -Wall -Wextra -Wpedantic -Wshadow -Wconversion -Wdouble-promotion -Wcast-qual -Wstrict-prototypes \
        -Wmissing-prototypes -Wvla -Wundef -Wwrite-strings -Wformat=2 -Wnull-dereference
WERROR ?= -Werror
# -ffp-contract=off: the same digits on every processor.
CFLAGS ?= -O2 -g
ifneq ($(SANITIZE),)
  SANITIZE_FLAGS := -fsanitize=$(SANITIZE) -fno-sanitize-recover=all -fno-omit-frame-pointer
endif
ALL_CFLAGS = -std=c17 -D_POSIX_C_SOURCE=200809L $(WARN) $(WERROR) $(CFLAGS) -ffp-contract=off -fPIC -fvisibility=hidden -MMD -MP \
             $(SANITIZE_FLAGS) -Iinclude -Isrc -I$(B)/generated $(CPPFLAGS)
LINK = $(CC) $(SANITIZE_FLAGS) $(LDFLAGS)

ifeq ($(shell uname -s),Darwin)
  SHARED := $(B)/libplatewright.dylib
  SHARED_FLAGS := -dynamiclib -install_name @rpath/libplatewright.dylib
else
  SHARED := $(B)/libplatewright.so.0
  SHARED_FLAGS := -shared -Wl,-soname,libplatewright.so.0
endif

LIBRARY_SOURCES := $(sort $(wildcard src/base/*.c src/tube/*.c src/supply/*.c src/stage/*.c src/report/*.c))
CLI_SOURCES := $(sort $(wildcard src/cli/*.c))
SCHEMAS := $(sort $(wildcard tubedata/*.xsd))
LIBRARY_OBJECTS := $(LIBRARY_SOURCES:%.c=$(B)/%.o) $(patsubst tubedata/%.xsd,$(B)/generated/schema_%.o,$(SCHEMAS))
CLI_OBJECTS := $(CLI_SOURCES:%.c=$(B)/%.o)
STATIC := $(B)/libplatewright.a
PROGRAM := $(B)/platewright

TEST_SOURCES := $(sort $(wildcard tests/unit/test_*.c tests/published/test_*.c tests/failure/test_*.c))
TESTS := $(TEST_SOURCES:%.c=$(B)/%)
BENCH := $(patsubst %.c,$(B)/%,$(sort $(wildcard tests/bench/*.c)))
FUZZERS := $(patsubst %.c,$(B)/%,$(sort $(wildcard tests/fuzz/fuzz_*.c)))

.PHONY: all
all: $(STATIC) $(SHARED) $(PROGRAM) $(B)/platewright.pc

$(B)/src/%.o: src/%.c
	@mkdir -p $(@D)
	$(CC) $(ALL_CFLAGS) $(PACKAGE_CFLAGS) -c $< -o $@

# A schema becomes a constant string in the library, so that the program works wherever it is copied.
$(B)/generated/schema_%.c: tubedata/%.xsd
	@mkdir -p $(@D)
	@{ echo '/* Made from $<; do not edit. */'; \
	   echo '#include "base/schemas.h"'; \
	   echo 'const char plw_schema_$*[] ='; \
	   sed -e 's/\\/\\\\/g' -e 's/"/\\"/g' -e 's/^/    "/' -e 's/$$/\\n"/' $<; echo ';'; } > $@

$(B)/generated/%.o: $(B)/generated/%.c
	$(CC) $(ALL_CFLAGS) -Wno-overlength-strings -c $< -o $@

$(STATIC): $(LIBRARY_OBJECTS)
	@rm -f $@
	$(AR) rcs $@ $^

$(SHARED): $(LIBRARY_OBJECTS)
	$(LINK) $(SHARED_FLAGS) $^ $(PACKAGE_LIBS) -lm -o $@

$(PROGRAM): $(CLI_OBJECTS) $(STATIC)
	$(LINK) $^ $(PACKAGE_LIBS) -lm -o $@

$(B)/platewright.pc: Makefile
	@mkdir -p $(@D)
	@{ echo 'prefix=$(PREFIX)'; echo 'Name: platewright'; \
	   echo 'Description: operating point of single-ended tube output stages'; \
	   echo 'Version: $(VERSION)'; echo 'Requires.private: $(PACKAGES)'; \
	   echo 'Libs: -L$${prefix}/lib -lplatewright'; echo 'Libs.private: -lm'; \
	   echo 'Cflags: -I$${prefix}/include'; } > $@

# ---- tests -------------------------------------------------------------------------------------------------------
$(B)/tests/%.o: tests/%.c
	@mkdir -p $(@D)
	$(CC) $(ALL_CFLAGS) -Itests -DTUBEDATA='"$(CURDIR)/tubedata"' -DTESTDATA='"$(CURDIR)/tests"' \
	    -DPROGRAM='"$(CURDIR)/$(PROGRAM)"' $(PACKAGE_CFLAGS) -c $< -o $@

TEST_LIBS := -lcmocka
$(B)/tests/unit/test_%: $(B)/tests/unit/test_%.o $(STATIC)
	$(LINK) $^ $(TEST_LIBS) $(PACKAGE_LIBS) -lm -o $@
$(B)/tests/published/test_%: $(B)/tests/published/test_%.o $(STATIC)
	$(LINK) $^ $(TEST_LIBS) $(PACKAGE_LIBS) -lm -o $@
$(B)/tests/failure/test_%: $(B)/tests/failure/test_%.o $(STATIC)
	$(LINK) $^ $(TEST_LIBS) $(PACKAGE_LIBS) -lm -o $@
$(B)/tests/bench/%: $(B)/tests/bench/%.o $(STATIC)
	$(LINK) $^ $(PACKAGE_LIBS) -lm -o $@

.PHONY: check check-headers check-units check-cli
check: all check-headers check-units check-cli
	@echo 'check: all passed'

# Each public header must compile alone.
check-headers:
	@for header in include/platewright/*.h; do \
	  printf '#include "platewright/%s"\n' "$${header##*/}" | \
	    $(CC) -std=c17 $(WARN) -Werror -Iinclude -fsyntax-only -x c - || exit 1; done

check-units: $(TESTS)
	@failed=0; for test in $(TESTS); do \
	  echo "== $${test#$(B)/tests/}"; LC_ALL=C.UTF-8 $(RUNNER) $$test || failed=1; done; exit $$failed

check-cli: $(PROGRAM)
	@B='$(B)' RUNNER='$(RUNNER)' LC_ALL=C.UTF-8 sh tests/cli/run

.PHONY: clean
clean:
	rm -rf build

-include $(wildcard $(B)/*.d $(B)/*/*.d $(B)/*/*/*.d $(B)/*/*/*/*.d)
