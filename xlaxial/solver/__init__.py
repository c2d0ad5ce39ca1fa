"""Solution of networks of axial bars by the displacement method, and what is read off it."""
