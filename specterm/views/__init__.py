"""Results as text figures and tables: pure functions from arrays and a size to rows of cells."""
