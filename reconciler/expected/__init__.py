"""What the bonds' own terms say must be paid, and to whom."""
