"""The pages of the window, one file each; what they have in common is in page.py."""
