use bevy::core_pipeline::{Core2d, Core2dSystems};
use bevy::prelude::*;
use bevy::render::RenderApp;
use bevy::render::extract_resource::{ExtractResource, ExtractResourcePlugin};
use bevy::render::render_asset::RenderAssets;
use bevy::render::render_resource::{Extent3d, Origin3d, TexelCopyTextureInfo};
use bevy::render::renderer::{RenderContext, ViewQuery};
use bevy::render::texture::GpuImage;
use bevy::render::view::ViewTarget;

/// A picture that is copied into the window below the panels, pixel by pixel.
///
/// On a CPU driver that is many times cheaper than to let the panels' shader draw it.
#[derive(Resource, Clone, ExtractResource)]
pub(crate) struct Inset {
    /// The picture.
    pub(crate) image: Handle<Image>,
    /// Where its top left goes (pixels from the window's top left).
    pub(crate) corner: UVec2,
}

/// Copies the [`Inset`] into the window in every frame.
pub(crate) fn inset_plugin(app: &mut App) {
    app.add_plugins(ExtractResourcePlugin::<Inset>::default());
    if let Some(render) = app.get_sub_app_mut(RenderApp) {
        let before_panels = copy.after(Core2dSystems::MainPass).before(bevy_egui::render::egui_pass);
        render.add_systems(Core2d, before_panels);
    }
}

fn copy(
    view: ViewQuery<&ViewTarget>,
    inset: Option<Res<Inset>>,
    images: Res<RenderAssets<GpuImage>>,
    mut context: RenderContext,
) {
    let target = view.into_inner();
    let Some(inset) = inset else { return };
    let Some(image) = images.get(&inset.image) else { return };
    let window = target.main_texture();
    let (from, corner) = (image.texture_descriptor.size, inset.corner);
    let left = |window: u32, corner: u32| window.saturating_sub(corner);
    let size = Extent3d {
        width: from.width.min(left(window.width(), corner.x)),
        height: from.height.min(left(window.height(), corner.y)),
        depth_or_array_layers: 1,
    };
    let origin = Origin3d { x: corner.x, y: corner.y, z: 0 };
    context.command_encoder().copy_texture_to_texture(
        image.texture.as_image_copy(),
        TexelCopyTextureInfo { origin, ..window.as_image_copy() },
        size,
    );
}
