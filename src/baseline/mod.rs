//! Smooth level counts: the Weyl expansion with corners, curvature and symmetry classes.
