//! Published physiology as pure functions, one file a topic. Each says its units, domain, formula and source.

pub mod acid_base;
pub mod body;
pub mod breath;
pub mod carbon_dioxide;
pub mod dead_space;
pub mod energy;
pub mod oxygen;
pub mod root;
pub mod stores;
pub mod weaning;
