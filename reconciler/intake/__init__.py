"""Files in: what others wrote becomes typed columns, and every row that cannot is named with its place and the reason."""
