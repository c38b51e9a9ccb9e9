"""A second, independent reckoning: without it the program could only be held against itself.

Everything here is plain Python on dates and fractions, one payment at a time, and imports nothing of the program.
`arithmetic` reckons, `issues` invents bonds, `deals` invents trades, `plants` puts faults in, `bank` pays, `writing`
writes the morning folder in the manners of several brokers, `world` puts it together with the truth, `verdict` holds
the program's files against that truth. It was chosen not to share a line with the program, so that one misreading of
the terms cannot pass unseen on both sides.
"""
