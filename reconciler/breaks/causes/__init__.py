"""Why a payment differs: every break that is a difference in a fact gets the cause that reproduces what was told, or the word that none does.

    cases       what each party told beside what the terms say
    reckoning   the payment reckoned again from changed facts
    accruals    variants  readings  slips    the ways of going wrong, each one entry in a list
    trying      one recomputed payment held against what was told
    singles     pairs      search    all ways over all cases: one, two, slips on top
    judging     when a fit is proof
    inputs      dates     why a told price, face, fee, side or day is wrong in itself
    across      what breaks say about each other
    naming      the outcome, put on the breaks

Adding a cause: one entry in the list of its family (`ACCRUALS`, `WHOLE`, `FEES`, `FACE`, `READINGS`, `SLIPS`, or a line in dates) and a
row in its test. The order of the lists is the order of the tries; weights order what fits.
"""

from reconciler.breaks.causes.naming import EXPLANATIONS, name_causes

__all__ = ["EXPLANATIONS", "name_causes"]
