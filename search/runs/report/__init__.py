"""sweep.html: what the page tells is decided in `content`, drawn by the template and its scripts."""
