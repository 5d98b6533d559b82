"""What is logged: channels, entries, instants, and the episode they make."""
