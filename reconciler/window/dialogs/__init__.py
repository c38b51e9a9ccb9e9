"""Questions the window asks and lists it shows apart: opening, exporting, columns of a file, problems, keys."""
