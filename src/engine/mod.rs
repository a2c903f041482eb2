//! Points x chains x blocks over threads; reviews, stop reasons, journal, resume; events and their sink.
