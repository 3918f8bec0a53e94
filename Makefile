# platewright: library, command line, tests.  GNU make 3.81 or later.
#
#   make deps demo   install what is needed, build, design the example stage, draw its plots
#   make check       build and run every test
#   make install     PREFIX=/usr/local, DESTDIR= are obeyed
#   make refit       recompute every tube's coefficients from its printed rows
#   make accuracy    the law against every printed row, in the fit and left out of it
#   make laws        the laws that were compared for pentodes and beam tubes, one table (tests/laws/README.md)
#   make bench       speed, as ratios within one run
#   make strict      format, static analysis, clang, sanitizers, valgrind, replay of the fuzzing corpus
#   make fuzz        coverage-guided fuzzing of the parsers (FUZZ_SECONDS=60)
#   make coverage    lines and branches reached by the tests
#   make clean       remove build/
#   make help        this list
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
  SHARED := $(B)/libplatewright.0.dylib
  SHARED_LINK := libplatewright.dylib
  SHARED_FLAGS := -dynamiclib -install_name @rpath/libplatewright.0.dylib
else
  SHARED := $(B)/libplatewright.so.0
  SHARED_LINK := libplatewright.so
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

# A line a file; V=1 shows whole commands.
ifeq ($(V),1)
  say = $(1)
else
  say = @echo '  $(2)'; $(1)
endif

# `make -j deps demo` must install before it compiles.
ifneq ($(filter deps,$(MAKECMDGOALS)),)
.NOTPARALLEL:
endif

$(B)/src/cli/%.o: CPPFLAGS += -DPLW_VERSION='"$(VERSION)"' -DPLW_DATA_DIR='"$(PREFIX)/share/platewright/tubedata"'

$(B)/src/%.o: src/%.c
	@mkdir -p $(@D)
	$(call say,$(CC) $(ALL_CFLAGS) $(PACKAGE_CFLAGS) -c $< -o $@,cc $<)

.SECONDARY:
# A schema becomes a constant string in the library, so that the program works wherever it is copied.
$(B)/generated/schema_%.c: tubedata/%.xsd
	@mkdir -p $(@D)
	@{ echo '/* Made from $<; do not edit. */'; \
	   echo '#include "base/schemas.h"'; \
	   echo 'const char plw_schema_$*[] ='; \
	   sed -e 's/\\/\\\\/g' -e 's/"/\\"/g' -e 's/^/    "/' -e 's/$$/\\n"/' $<; echo ';'; } > $@

$(B)/generated/%.o: $(B)/generated/%.c
	$(call say,$(CC) $(ALL_CFLAGS) -Wno-overlength-strings -c $< -o $@,cc $<)

$(STATIC): $(LIBRARY_OBJECTS)
	@rm -f $@
	$(call say,$(AR) rcs $@ $^,archive $@)

$(SHARED): $(LIBRARY_OBJECTS)
	$(call say,$(LINK) $(SHARED_FLAGS) $^ $(PACKAGE_LIBS) -lm -o $@,link $@)

$(PROGRAM): $(CLI_OBJECTS) $(STATIC)
	$(call say,$(LINK) $^ $(PACKAGE_LIBS) -lm -o $@,link $@)

# Always written: PREFIX may be another than at the last call.
.PHONY: $(B)/platewright.pc
$(B)/platewright.pc:
	@mkdir -p $(@D)
	@{ echo 'prefix=$(PREFIX)'; echo 'Name: platewright'; \
	   echo 'Description: operating point of single-ended tube output stages'; \
	   echo 'Version: $(VERSION)'; echo 'Requires.private: $(PACKAGES)'; \
	   echo 'Libs: -L$${prefix}/lib -lplatewright'; echo 'Libs.private: -lm'; \
	   echo 'Cflags: -I$${prefix}/include'; } > $@

# ---- tests -------------------------------------------------------------------------------------------------------
TEST_PLACES := -DTUBEDATA='"$(CURDIR)/tubedata"' -DTESTDATA='"$(CURDIR)/tests"' -DPROGRAM='"$(CURDIR)/$(PROGRAM)"'
$(B)/tests/%.o: tests/%.c
	@mkdir -p $(@D)
	$(call say,$(CC) $(ALL_CFLAGS) -Itests $(TEST_PLACES) $(PACKAGE_CFLAGS) -c $< -o $@,cc $<)

TEST_LIBS := -lcmocka
$(B)/tests/unit/test_%: $(B)/tests/unit/test_%.o $(STATIC)
	$(call say,$(LINK) $^ $(TEST_LIBS) $(PACKAGE_LIBS) -lm -o $@,link $@)
$(B)/tests/published/test_%: $(B)/tests/published/test_%.o $(STATIC)
	$(call say,$(LINK) $^ $(TEST_LIBS) $(PACKAGE_LIBS) -lm -o $@,link $@)
$(B)/tests/failure/test_%: $(B)/tests/failure/test_%.o $(STATIC)
	$(call say,$(LINK) $^ $(TEST_LIBS) $(PACKAGE_LIBS) -lm -o $@,link $@)
$(B)/tests/bench/%: $(B)/tests/bench/%.o $(STATIC)
	$(call say,$(LINK) $^ $(PACKAGE_LIBS) -lm -o $@,link $@)

# A test that needs a library of its own says so beside it.
include $(wildcard tests/*/*.mk)

.PHONY: check check-headers check-units check-accuracy check-cli
check: all check-headers check-units check-accuracy check-cli
	@echo 'check: all passed'

# Each public header must compile alone.
check-headers:
	@for header in include/platewright/*.h; do \
	  printf '#include "platewright/%s"\n' "$${header##*/}" | \
	    $(CC) -std=c17 $(WARN) -Werror -Iinclude -fsyntax-only -x c - || exit 1; done

check-units: $(TESTS)
	@failed=0; for test in $(TESTS); do \
	  echo "== $${test#$(B)/tests/}"; LC_ALL=C.UTF-8 $(RUNNER) $$test || failed=1; done; exit $$failed

# The law against every printed row, in the fit and left out of it.
check-accuracy: $(B)/tests/bench/accuracy
	@$< --marks tubedata

check-cli: $(PROGRAM)
	@B='$(B)' RUNNER='$(RUNNER)' LC_ALL=C.UTF-8 sh tests/cli/run
	@B='$(B)' sh tests/cli/readme

# ---- what is needed ------------------------------------------------------------------------------------------------
DEBIAN_PACKAGES := gcc libc6-dev make pkg-config libxml2-dev libxml2-utils libgsl-dev libjansson-dev libcmocka-dev \
                   libsundials-dev gnuplot-nox
STRICT_PACKAGES := clang clang-format clang-tidy cppcheck valgrind libclang-rt-dev mandoc

.PHONY: deps deps-strict
deps:
	@sh tests/tools/install $(DEBIAN_PACKAGES)
deps-strict:
	@sh tests/tools/install $(STRICT_PACKAGES)

# ---- the example stage and its drawings ----------------------------------------------------------------------------
DEMO_STAGE := plots/quay-radio.xml
.PHONY: demo
demo: all
	$(PROGRAM) design $(DEMO_STAGE)
	$(PROGRAM) plot $(DEMO_STAGE) --kind load-line --output plots/load-line.svg
	$(PROGRAM) plot $(DEMO_STAGE) --kind transfer --output plots/transfer.svg
	$(PROGRAM) plot $(DEMO_STAGE) --kind supply --output plots/supply.svg
	@echo 'drawn: plots/load-line.svg plots/transfer.svg plots/supply.svg'

# ---- coefficients from the printed rows ----------------------------------------------------------------------------
TUBES := $(sort $(wildcard tubedata/*.xml))
.PHONY: refit accuracy bench
# Exit status 1: printed figures of a tube contradict each other; its coefficients are what they give all the same.
refit: $(PROGRAM)
	@for tube in $(TUBES); do \
	  if grep -q 'kind="rectifier"' $$tube; then continue; fi; \
	  $(PROGRAM) fit $$tube --output $$tube || [ $$? -eq 1 ] || exit 1; done

accuracy: $(B)/tests/bench/accuracy
	@$(B)/tests/bench/accuracy tubedata

bench: $(PROGRAM) $(BENCH)
	@for bench in $(filter-out %/accuracy,$(BENCH)); do echo "== $${bench##*/}"; $$bench || exit 1; done

# ---- stricter checks -----------------------------------------------------------------------------------------------
SOURCES := $(sort $(wildcard src/*/*.c src/*/*.h include/platewright/*.h tests/*.h tests/*/*.c tests/*/*.h))
.PHONY: strict asan valgrind clang-check tidy cppcheck format format-check fuzz fuzz-replay coverage
strict: format-check cppcheck tidy clang-check asan valgrind fuzz-replay

clang-check:
	$(MAKE) CC=clang B=build/clang check
asan:
	$(MAKE) B=build/asan SANITIZE=address,undefined check
valgrind: all $(TESTS)
	@for test in $(TESTS); do \
	  echo "== valgrind $${test#$(B)/tests/}"; \
	  valgrind -q --leak-check=full --show-leak-kinds=definite,possible --errors-for-leak-kinds=definite,possible \
	    --error-exitcode=9 $$test > $(B)/valgrind.log 2>&1 || { cat $(B)/valgrind.log; exit 1; }; done

# One process a file: checked together, clang-tidy 14 takes a va_list for uninitialised from the second file on.
tidy: $(patsubst %.c,$(B)/tidy/%.ok,$(LIBRARY_SOURCES) $(CLI_SOURCES))
$(B)/tidy/%.ok: %.c $(wildcard include/platewright/*.h src/*/*.h) .clang-tidy
	@mkdir -p $(@D)
	$(call say,clang-tidy --quiet $< -- -std=c17 -D_POSIX_C_SOURCE=200809L -Iinclude -Isrc $(PACKAGE_CFLAGS) 2>/dev/null,tidy $<)
	@touch $@

cppcheck:
	cppcheck --quiet --std=c11 --enable=warning,performance,portability --inline-suppr --error-exitcode=1 \
	  --suppress=missingIncludeSystem -Iinclude -Isrc src

format:
	clang-format -i $(SOURCES)
format-check:
	clang-format --dry-run --Werror $(SOURCES)

$(B)/fuzz/%: tests/fuzz/%.c $(LIBRARY_SOURCES) | $(SCHEMAS:tubedata/%.xsd=$(B)/generated/schema_%.c)
	@mkdir -p $(@D)
	clang -std=c17 -D_POSIX_C_SOURCE=200809L -g -O1 -fsanitize=fuzzer,address,undefined -fno-sanitize-recover=all \
	  -Iinclude -Isrc $(PACKAGE_CFLAGS) $< $(LIBRARY_SOURCES) $(SCHEMAS:tubedata/%.xsd=$(B)/generated/schema_%.c) \
	  $(PACKAGE_LIBS) -lm -o $@
FUZZ_SECONDS ?= 60
fuzz: $(patsubst tests/fuzz/%.c,$(B)/fuzz/%,$(wildcard tests/fuzz/fuzz_*.c))
	@for fuzzer in $^; do mkdir -p $(B)/corpus/$${fuzzer##*/}; \
	  $$fuzzer -max_total_time=$(FUZZ_SECONDS) -rss_limit_mb=2048 $(B)/corpus/$${fuzzer##*/} tubedata tests/bad_data || exit 1; done

# Every file of the corpus once through each parser, with the ordinary compiler.
$(B)/tests/fuzz/%: $(B)/tests/fuzz/%.o $(B)/tests/fuzz/replay.o $(STATIC)
	$(call say,$(LINK) $^ $(PACKAGE_LIBS) -lm -o $@,link $@)
fuzz-replay: $(FUZZERS)
	@for fuzzer in $(FUZZERS); do $$fuzzer tubedata/* tests/bad_data/* plots/* || exit 1; done

coverage:
	$(MAKE) B=build/coverage CFLAGS='-O0 -g --coverage' LDFLAGS=--coverage check
	@cd build/coverage && find . -path './src/*.gcda' | xargs gcov -n 2>/dev/null | grep -A1 "^File 'src/"

# ---- installation --------------------------------------------------------------------------------------------------
.PHONY: install
install: all
	install -d $(DESTDIR)$(PREFIX)/bin $(DESTDIR)$(PREFIX)/lib/pkgconfig $(DESTDIR)$(PREFIX)/include/platewright \
	  $(DESTDIR)$(PREFIX)/share/platewright/tubedata $(DESTDIR)$(PREFIX)/share/man/man1 \
	  $(DESTDIR)$(PREFIX)/share/bash-completion/completions
	install -m 755 $(PROGRAM) $(DESTDIR)$(PREFIX)/bin/
	install -m 644 $(STATIC) $(SHARED) $(DESTDIR)$(PREFIX)/lib/
	ln -sf $(notdir $(SHARED)) $(DESTDIR)$(PREFIX)/lib/$(SHARED_LINK)
	install -m 644 $(B)/platewright.pc $(DESTDIR)$(PREFIX)/lib/pkgconfig/
	install -m 644 include/platewright/*.h $(DESTDIR)$(PREFIX)/include/platewright/
	install -m 644 tubedata/*.xml tubedata/*.xsd $(DESTDIR)$(PREFIX)/share/platewright/tubedata/
	$(PROGRAM) --man > $(DESTDIR)$(PREFIX)/share/man/man1/platewright.1
	$(PROGRAM) --completion > $(DESTDIR)$(PREFIX)/share/bash-completion/completions/platewright

.PHONY: help
help:
	@sed -n 's/^#   //p' Makefile

.PHONY: clean
clean:
	rm -rf build

-include $(wildcard $(B)/*.d $(B)/*/*.d $(B)/*/*/*.d $(B)/*/*/*/*.d)
