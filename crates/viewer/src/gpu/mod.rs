//! Bevy draws a drawing: balls as squares on which the shader finds the sphere, rods as
//! strips that face the eye, meshes as they are.

mod buffers;
mod bytes;
mod copy;
mod pass;
mod recorder;

pub(crate) use copy::{Inset, inset_plugin};
pub use recorder::Recorder;
pub(crate) use recorder::{FINENESS, enlarged};

use bedswell_painter::{Camera, Colour, Drawing};
use bevy::core_pipeline::tonemapping::{DebandDither, Tonemapping};
use bevy::core_pipeline::{Core3d, Core3dSystems};
use bevy::prelude::*;
use bevy::render::extract_resource::{ExtractResource, ExtractResourcePlugin};
use bevy::render::render_resource::{TextureFormat, TextureUsages};
use bevy::render::{GpuResourceAppExt, Render, RenderApp, RenderSystems};
use std::sync::Arc;

/// What Bevy's cameras draw.
#[derive(Resource, Clone, ExtractResource)]
pub(crate) struct Shown {
    /// The things.
    pub(crate) drawing: Arc<Drawing>,
    /// The view; its size is that of the target.
    pub(crate) camera: Camera,
    /// Least width of a rod (pixels of the target).
    pub(crate) thinnest: f32,
}

/// Teaches Bevy to draw what is [`Shown`].
pub(crate) fn plugin(app: &mut App) {
    app.add_plugins(ExtractResourcePlugin::<Shown>::default());
    let shader = app
        .world_mut()
        .resource_mut::<Assets<Shader>>()
        .add(Shader::from_wgsl(include_str!("scene.wgsl"), "bedswell/scene.wgsl"));
    let Some(render) = app.get_sub_app_mut(RenderApp) else { return };
    render
        .insert_resource(pass::SceneShader(shader))
        .add_systems(Render, buffers::upload.in_set(RenderSystems::PrepareResources))
        .add_systems(Core3d, pass::draw.in_set(Core3dSystems::MainPass));
    render.init_gpu_resource::<pass::Pipelines>();
}

/// A camera that draws into a texture of the right format.
pub(crate) fn camera(target: Handle<Image>, background: Colour) -> impl Bundle {
    (
        Camera3d::default(),
        bevy::camera::Camera { clear_color: clear_colour(background), order: -1, ..default() },
        bevy::camera::RenderTarget::Image(target.into()),
        Tonemapping::None,
        DebandDither::Disabled,
        Msaa::Off,
    )
}

/// A texture to draw into.
pub(crate) fn target(width: u32, height: u32) -> Image {
    let mut image = Image::new_target_texture(width, height, TextureFormat::Rgba8UnormSrgb, None);
    image.texture_descriptor.usage |= TextureUsages::COPY_SRC;
    image
}

/// The background, premultiplied like all else.
pub(crate) fn clear_colour(background: Colour) -> ClearColorConfig {
    let colour = Color::srgba_u8(background.r, background.g, background.b, background.a).to_linear();
    let a = colour.alpha;
    ClearColorConfig::Custom(Color::LinearRgba(LinearRgba::new(
        colour.red * a,
        colour.green * a,
        colour.blue * a,
        a,
    )))
}
