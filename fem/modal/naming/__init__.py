"""Names and shares of modes: what moves, told from the shape of the motion alone."""
