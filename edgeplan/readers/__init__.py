"""The only room that opens input files: a board folder in, one validated record out."""

from edgeplan.readers.board_folder import read_board as read_board

__all__ = ["read_board"]
