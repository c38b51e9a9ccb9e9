"""What was told is paired with what was expected: tickets with confirmations, bank entries with payments."""
