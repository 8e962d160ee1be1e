//! The border to Python.
