"""Arithmetic on arrays: calendars, day counts, schedules, accrual, pricing; no files, no clock, no loops over
trades."""
