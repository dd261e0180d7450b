//! Undoes gzip and Zstandard, recognised by their first bytes; several members or frames one after another count as
//! one file.

use std::io::{self, BufRead, BufReader, Read};

use flate2::bufread::MultiGzDecoder;
use ruzstd::decoding::errors::{FrameDecoderError, ReadFrameHeaderError};
use ruzstd::decoding::{BlockDecodingStrategy, FrameDecoder};

/// The first bytes of a gzip member (RFC 1952).
const GZIP: &[u8] = &[0x1f, 0x8b];
/// The first bytes of a Zstandard frame (RFC 8878).
const ZSTANDARD: &[u8] = &[0x28, 0xb5, 0x2f, 0xfd];
/// The largest window of a Zstandard frame that is decoded: what `zstd --long` needs at most by default.
const LARGEST_WINDOW: u64 = 128 << 20;

/// The plain bytes of a file that may be compressed.
pub(super) fn plain(file: impl Read + 'static) -> io::Result<Box<dyn BufRead>> {
    let mut file = BufReader::with_capacity(1 << 16, file);
    let head = file.fill_buf()?;
    if head.starts_with(GZIP) {
        Ok(Box::new(BufReader::with_capacity(1 << 16, MultiGzDecoder::new(file))))
    } else if head.starts_with(ZSTANDARD) {
        Ok(Box::new(BufReader::with_capacity(1 << 16, ZstandardFrames::new(file))))
    } else {
        Ok(Box::new(file))
    }
}

/// The frames of a Zstandard file, decoded one after another.
struct ZstandardFrames<R> {
    decoder: FrameDecoder,
    source: R,
}

impl<R: BufRead> ZstandardFrames<R> {
    fn new(source: R) -> Self {
        let mut decoder = FrameDecoder::new();
        decoder.set_max_window_size(LARGEST_WINDOW);
        Self { decoder, source }
    }

    /// Begins the next frame; false at the end of the file. Skippable frames hold no content (RFC 8878, 3.1.2).
    fn begin(&mut self) -> io::Result<bool> {
        while !self.source.fill_buf()?.is_empty() {
            match self.decoder.init(&mut self.source) {
                Ok(()) => return Ok(true),
                Err(FrameDecoderError::ReadFrameHeaderError(ReadFrameHeaderError::SkipFrame {
                    length,
                    ..
                })) => {
                    io::copy(&mut self.source.by_ref().take(length.into()), &mut io::sink())?;
                }
                Err(error) => return Err(io::Error::other(error)),
            }
        }
        Ok(false)
    }
}

impl<R: BufRead> Read for ZstandardFrames<R> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        while self.decoder.can_collect() == 0 {
            // A decoder that no frame has been given to counts as finished.
            if !self.decoder.is_finished() {
                let one_block = BlockDecodingStrategy::UptoBlocks(1);
                self.decoder.decode_blocks(&mut self.source, one_block).map_err(io::Error::other)?;
            } else if !self.begin()? {
                return Ok(0);
            }
        }
        self.decoder.read(buffer)
    }
}
