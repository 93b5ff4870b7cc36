//! Products, their presentations and customers.
