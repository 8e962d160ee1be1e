"""File formats: how bytes are written and read. What they mean is known to the classes that call these."""
