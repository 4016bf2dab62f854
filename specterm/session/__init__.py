"""What outlives a single computation: the document, its file, the presets, sessions, pins, notebook."""
