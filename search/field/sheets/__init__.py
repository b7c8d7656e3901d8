"""The drawing of the crew packet: lettering, a sheet of paper, and one file for each kind of page."""
