"""What a table of measurements is made of: rows, their combination into data, uncertainties, files."""
