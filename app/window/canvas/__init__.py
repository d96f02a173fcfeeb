"""The canvas: the picture with everything marked on it, and the gestures that mark."""

from app.window.canvas.sheet_view import SheetView

__all__ = ["SheetView"]
