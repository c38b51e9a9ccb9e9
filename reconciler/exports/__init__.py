"""Tables out of the house: CSV for any program, XLSX for a spreadsheet."""
