"""The work behind each command: one module each, answering with an `Answer`."""
