"""Reading: a board file and the catalogue become one typed, frozen board, or all their problems with places."""
