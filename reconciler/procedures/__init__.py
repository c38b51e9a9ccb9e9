"""What people do, as use cases: the one corridor between the window and commands above and the rooms below."""
