# The laws compared: `make laws` prints one table, `make laws-expectations` what each candidate's expectations come from.
# A candidate takes the place of src/tube/law.c and src/tube/fit_expected.c when tests/bench/accuracy.c is linked.
# SPDX-License-Identifier: GPL-3.0-or-later

SCREENED_CANDIDATES := trial division fixed_knee moving_knee
TRIODE_CANDIDATES := koren koren_foot
LAW_CANDIDATES := $(SCREENED_CANDIDATES) $(TRIODE_CANDIDATES)
LAW_PROGRAMS := $(LAW_CANDIDATES:%=$(B)/tests/laws/%_accuracy)
$(foreach law,$(SCREENED_CANDIDATES) shipped,$(eval tubes_of_$(law) := --screened))
$(foreach law,$(TRIODE_CANDIDATES) shipped_triodes,$(eval tubes_of_$(law) := --triodes))

$(LAW_PROGRAMS): $(B)/tests/laws/%_accuracy: $(B)/tests/bench/accuracy.o $(B)/tests/laws/candidate.o \
    $(B)/tests/laws/candidate_expected.o $(B)/tests/laws/%_law.o $(STATIC)
	$(LINK) $^ $(PACKAGE_LIBS) -lm -o $@

# The catalogue without the coefficients of the shipped law, which the others could not read.
$(B)/laws/tubedata: $(wildcard tubedata/*.xml)
	@rm -rf $@ && mkdir -p $@
	@for tube in $^; do \
	  sed '/<model /,/<\/model>/d' $$tube > $@/$${tube##*/} || exit 1; done

# First pass: every tube with wide expectations.  From these fits the expectations of each type, without its family.
$(B)/laws/%.coefficients: $(B)/tests/laws/%_accuracy $(B)/laws/tubedata
	@$< $(tubes_of_$*) --coefficients $* $(B)/laws/tubedata > $@.part && mv $@.part $@
$(B)/laws/%.expectations: $(B)/laws/%.coefficients tests/laws/expectations.awk
	@awk -f tests/laws/expectations.awk $< > $@.part && mv $@.part $@

$(B)/laws/%.totals: $(B)/tests/laws/%_accuracy $(B)/laws/%.expectations
	@EXPECTATIONS=$(B)/laws/$*.expectations $< $(tubes_of_$*) --summary $* $(B)/laws/tubedata > $@.part && mv $@.part $@
$(B)/laws/shipped.totals $(B)/laws/shipped_triodes.totals: $(B)/laws/%.totals: $(B)/tests/bench/accuracy $(B)/laws/tubedata
	@$< $(tubes_of_$*) --summary shipped $(B)/laws/tubedata > $@.part && mv $@.part $@

.PRECIOUS: $(B)/laws/%.coefficients $(B)/laws/%.expectations
.PHONY: laws laws-expectations
laws: $(LAW_CANDIDATES:%=$(B)/laws/%.totals) $(B)/laws/shipped.totals $(B)/laws/shipped_triodes.totals
	@awk -f tests/laws/table.awk $(SCREENED_CANDIDATES:%=$(B)/laws/%.totals) $(B)/laws/shipped.totals
	@awk -f tests/laws/pairs.awk $(B)/laws/moving_knee.totals \
	  $(filter-out %/moving_knee.totals,$(SCREENED_CANDIDATES:%=$(B)/laws/%.totals))
	@printf '\ntriodes\n'
	@awk -f tests/laws/table.awk $(TRIODE_CANDIDATES:%=$(B)/laws/%.totals) $(B)/laws/shipped_triodes.totals
	@awk -f tests/laws/pairs.awk $(B)/laws/koren_foot.totals $(B)/laws/koren.totals
laws-expectations: $(LAW_CANDIDATES:%=$(B)/laws/%.coefficients)
	@for law in $^; do awk -v summary=1 -f tests/laws/expectations.awk $$law; done
