"""The clerk sees the morning in one window; nothing is computed here.

Lists are models over the tables of records.py, work runs in jobs.py (the one file with threads), colours and sizes come from
tokens.py, and everything asked of the rooms below goes through `procedures`. What this room does not do: arithmetic on
payments, reading files, deciding what is a break.
"""
