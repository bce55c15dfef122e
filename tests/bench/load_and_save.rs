//! Loads a drawing with the `dxf` crate and saves it again: what measurements are held against.

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let mut names = std::env::args().skip(1);
    let (Some(from), Some(to)) = (names.next(), names.next()) else {
        return Err("name a drawing and where to save it".into());
    };
    dxf::Drawing::load_file(from)?.save_file(to)?;
    Ok(())
}
