"""Arithmetic on arrays: calendars, day counts, schedules, accrual, pricing; no clock, no loops over trades."""
