use crate::Scene;

/// An ensemble of packs, at each level of one factor or of a single scene.
#[derive(Clone, Debug, PartialEq)]
pub struct Study {
    /// What the study is called in reports.
    pub name: String,
    /// Packs at each level, at most.
    pub packs: u64,
    /// Half-width of the tear fraction's 95 % interval at which a level stops early.
    pub half_width: Option<f64>,
    /// The key of the scene that varies, if one does.
    pub factor: Option<String>,
    /// The scenes, one per value of the factor.
    pub levels: Vec<Level>,
}

/// One value of a study's factor.
#[derive(Clone, Debug, PartialEq)]
pub struct Level {
    /// The value as written in the study file; empty without a factor.
    pub value: String,
    /// The scene with that value.
    pub scene: Scene,
}
