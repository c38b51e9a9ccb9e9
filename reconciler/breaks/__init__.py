"""What does not agree: differences found, put into words, weighed and ranked."""
