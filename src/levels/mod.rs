//! Level lists and their smoothed staircase.
