//! Matching of densities across a heavy-quark threshold.
