//! Fields of cosines.
