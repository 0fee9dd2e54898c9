"""Reading: a board file and the catalogue become one typed, frozen board, or all their problems with places."""

from rowkeeper.reading.board_file import read_board, read_board_text

__all__ = ["read_board", "read_board_text"]
