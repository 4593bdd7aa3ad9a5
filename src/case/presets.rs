//! The profiles and cases that come with the program.

/// A file that comes with the program.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Preset {
    /// Its name.
    pub name: &'static str,
    /// Its text.
    pub text: &'static str,
}

/// The built-in profiles, by name.
pub static PROFILES: [Preset; 6] = [
    Preset { name: "brain-injury", text: include_str!("../../presets/profiles/brain-injury.toml") },
    Preset {
        name: "chronic-hypercapnia",
        text: include_str!("../../presets/profiles/chronic-hypercapnia.toml"),
    },
    Preset { name: "healthy-lungs", text: include_str!("../../presets/profiles/healthy-lungs.toml") },
    Preset { name: "lung-protective", text: include_str!("../../presets/profiles/lung-protective.toml") },
    Preset { name: "obstructed", text: include_str!("../../presets/profiles/obstructed.toml") },
    Preset { name: "permissive", text: include_str!("../../presets/profiles/permissive.toml") },
];

/// The built-in cases, by name.
pub static CASES: [Preset; 12] = [
    Preset { name: "after-operation", text: include_str!("../../presets/cases/after-operation.toml") },
    Preset { name: "brain-injury", text: include_str!("../../presets/cases/brain-injury.toml") },
    Preset { name: "chronic-retainer", text: include_str!("../../presets/cases/chronic-retainer.toml") },
    Preset { name: "fever", text: include_str!("../../presets/cases/fever.toml") },
    Preset { name: "injured-lungs", text: include_str!("../../presets/cases/injured-lungs.toml") },
    Preset {
        name: "injured-lungs-exchanger",
        text: include_str!("../../presets/cases/injured-lungs-exchanger.toml"),
    },
    Preset { name: "leak", text: include_str!("../../presets/cases/leak.toml") },
    Preset {
        name: "obstruction-pressure",
        text: include_str!("../../presets/cases/obstruction-pressure.toml"),
    },
    Preset { name: "obstruction-volume", text: include_str!("../../presets/cases/obstruction-volume.toml") },
    Preset { name: "ready-to-wean", text: include_str!("../../presets/cases/ready-to-wean.toml") },
    Preset { name: "three-days", text: include_str!("../../presets/cases/three-days.toml") },
    Preset { name: "triggering", text: include_str!("../../presets/cases/triggering.toml") },
];

/// The built-in profile called `name`.
pub fn profile(name: &str) -> Option<&'static Preset> {
    PROFILES.iter().find(|preset| preset.name == name)
}

/// The built-in case called `name`.
pub fn case(name: &str) -> Option<&'static Preset> {
    CASES.iter().find(|preset| preset.name == name)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::case::{file, read};

    #[test]
    fn every_built_in_profile_and_case_reads_without_a_fault() {
        for preset in &PROFILES {
            let profile = read::profile(preset.text.as_bytes());
            assert_eq!(profile.as_ref().map(|profile| profile.name.as_str()), Ok(preset.name));
        }
        for preset in &CASES {
            let read = read::case(preset.text.as_bytes(), &|name| file::profile(name, None));
            assert_eq!(read.map(|_| ()), Ok(()), "{}", preset.name);
        }
    }

    #[test]
    fn every_preset_in_the_folder_is_built_in() {
        let count = |kind: &str| {
            let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("presets").join(kind);
            std::fs::read_dir(folder).unwrap().count()
        };
        assert_eq!((count("profiles"), count("cases")), (PROFILES.len(), CASES.len()));
    }
}
