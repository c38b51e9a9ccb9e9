"""Arithmetic on arrays: calendars, day counts, schedules, accrual, pricing, settlement; no files, no clock, no loops over trades."""
