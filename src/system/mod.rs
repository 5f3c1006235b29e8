//! From a system file to a validated model.
