//! A part of the trial of the audit: faults planted in the first five lists of each shape.
