/* A model as a compact binary image, for flash or for the air: checked in place and evaluated without copying.
 *
 * LAYOUT (little-endian bytes, whatever the target; offsets in bytes):
 *    0  magic "MGNI"              4  layout version, u16 (1)        6  degree, u16
 *    8  order, u16               10  pieces, u16                   12  total size in bytes, u32
 *   16  valid from, i32          20  valid until, i32              years times MAGNAV_IMAGE_YEAR
 *   24  name, 16 bytes, zero filled
 *   40  per power 0 .. 5: divisor, u32 (0: the power is absent)     64  per power 0 .. 5: bytes of a value, u8 (2 or 4)
 *   70  two zero bytes           72  breaks, i32 each, pieces + 1: years times MAGNAV_IMAGE_YEAR
 *    .  values, signed integers, of piece 0 power 0, piece 0 power 1, ..., piece 1 power 0, ...: each block in the order
 *       g10 g11 h11 g20 ..., padded with zero bytes to a multiple of four
 *  end  CRC-32 (IEEE 802.3: polynomial 0x04C11DB7 reflected, initial and final complement) of all bytes before it, u32
 * A value over its power's divisor is the coefficient, correctly rounded: the same number that the desk reads.
 *
 * DETECTION. The CRC finds every error of one or two bits and every burst of up to 32 bits in an image; the sizes in
 * the header find truncation and images put together; the version an image of another layout. */
#ifndef MAGNAV_IMAGE_H
#define MAGNAV_IMAGE_H

#include "magnav_core.h"

#ifdef __cplusplus
extern "C" {
#endif

#define MAGNAV_IMAGE_VERSION 1
#define MAGNAV_IMAGE_HEADER 72
#define MAGNAV_IMAGE_YEAR 10000
#define MAGNAV_IMAGE_NAME 16

/* A checked image: points into the caller's bytes, which must stay. */
typedef struct magnav_image {
    const uint8_t *bytes;
    magnav_real valid_from_yr, valid_until_yr;
    int32_t degree, order, pieces;
    char name[17]; /* MAGNAV_IMAGE_NAME and a zero */
} magnav_image;

/* CRC-32 of some bytes, as the image uses it. */
uint32_t magnav_crc32(const uint8_t *bytes, size_t size);

/* Check `size` bytes and describe them. MAGNAV_E_MODEL where they are no image of this version, are cut, longer than
 * their image, or altered; MAGNAV_E_MEMORY where the image is sound but beyond this build's MAGNAV_MAX_DEGREE or
 * MAGNAV_MAX_TIME_ORDER. */
magnav_status magnav_image_open(const uint8_t *bytes, size_t size, magnav_image *image);

/* As magnav_snapshot_at, from an image. In the double build the same bits as from the desk's model. */
magnav_status magnav_image_snapshot(const magnav_image *image, magnav_real year, int32_t extrapolate,
                                    magnav_real *memory, size_t memory_reals, magnav_snapshot *snapshot);

#ifdef __cplusplus
}
#endif
#endif
