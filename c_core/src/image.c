/* A model's binary image: checked in place, read value by value in whatever byte order the target has. */
#include "magnav_image.h"

#include "real.h"
#include "timeline.h"

#define DIVISORS 40
#define WIDTHS 64
#define POWERS 6
#define CRC_BYTES 4

static uint32_t read_u16(const uint8_t *at)
{
    return (uint32_t)at[0] | ((uint32_t)at[1] << 8);
}

static uint32_t read_u32(const uint8_t *at)
{
    return read_u16(at) | (read_u16(at + 2) << 16);
}

/* Two's complement without an implementation-defined conversion. */
static int32_t read_signed(const uint8_t *at, uint32_t bytes)
{
    const uint32_t raw = (bytes == 2U) ? read_u16(at) : read_u32(at);
    const uint32_t sign = (bytes == 2U) ? 0x8000U : 0x80000000U;
    return (raw & sign) ? -(int32_t)(sign - (raw & ~sign) - 1U) - 1 : (int32_t)raw;
}

uint32_t magnav_crc32(const uint8_t *bytes, size_t size)
{
    uint32_t crc = 0xFFFFFFFFU;
    for (size_t i = 0; i < size; i++) {
        crc ^= bytes[i];
        for (int32_t bit = 0; bit < 8; bit++) {
            crc = (crc >> 1) ^ ((crc & 1U) ? 0xEDB88320U : 0U);
        }
    }
    return ~crc;
}

/* Bytes of one block: the values of one power in one piece, padded to a multiple of four. */
static size_t block_bytes(const uint8_t *bytes, int32_t degree, int32_t power)
{
    const size_t terms = (size_t)degree * ((size_t)degree + 2);
    return (terms * bytes[WIDTHS + power] + 3U) / 4U * 4U;
}

static size_t piece_bytes(const uint8_t *bytes, int32_t degree, int32_t order)
{
    size_t sum = 0;
    for (int32_t power = 0; power < order; power++) {
        sum += block_bytes(bytes, degree, power);
    }
    return sum;
}

static magnav_real image_break(const void *source, int32_t i)
{
    const magnav_image *image = (const magnav_image *)source;
    return (magnav_real)read_signed(image->bytes + MAGNAV_IMAGE_HEADER + 4 * (size_t)i, 4U) /
           (magnav_real)MAGNAV_IMAGE_YEAR;
}

static magnav_real image_value(const void *source, int32_t piece, int32_t power, int32_t term)
{
    const magnav_image *image = (const magnav_image *)source;
    const uint8_t *bytes = image->bytes;
    const uint8_t *at = bytes + MAGNAV_IMAGE_HEADER + 4 * ((size_t)image->pieces + 1) +
                        (size_t)piece * piece_bytes(bytes, image->degree, image->order);
    for (int32_t k = 0; k < power; k++) {
        at += block_bytes(bytes, image->degree, k);
    }
    return (magnav_real)read_signed(at + (size_t)term * bytes[WIDTHS + power], bytes[WIDTHS + power]) /
           (magnav_real)read_u32(bytes + DIVISORS + 4 * power);
}

/* The header is sound and says the size that there is; all else is left to the checksum. */
static int32_t header_sound(const uint8_t *bytes, size_t size)
{
    const uint32_t degree = read_u16(bytes + 6);
    const uint32_t order = read_u16(bytes + 8);
    const uint32_t pieces = read_u16(bytes + 10);
    size_t expected;

    if (bytes[0] != 0x4DU || bytes[1] != 0x47U || bytes[2] != 0x4EU || bytes[3] != 0x49U ||
        read_u16(bytes + 4) != MAGNAV_IMAGE_VERSION) {
        return 0;
    }
    if (degree < 1U || degree > 2000U || order < 1U || order > POWERS || pieces < 1U || pieces > 10000U) {
        return 0;
    }
    for (uint32_t power = 0; power < POWERS; power++) {
        const uint8_t width = bytes[WIDTHS + power];
        const int32_t present = power < order;
        if (present != (width == 2U || width == 4U) || present != (read_u32(bytes + DIVISORS + 4U * power) != 0U)) {
            return 0;
        }
    }
    expected = MAGNAV_IMAGE_HEADER + 4U * ((size_t)pieces + 1U) +
               (size_t)pieces * piece_bytes(bytes, (int32_t)degree, (int32_t)order) + CRC_BYTES;
    return expected == size && read_u32(bytes + 12) == size;
}

magnav_status magnav_image_open(const uint8_t *bytes, size_t size, magnav_image *image)
{
    magnav_image found;

    if (bytes == NULL || image == NULL) {
        return MAGNAV_E_NULL;
    }
    if (size < MAGNAV_IMAGE_HEADER + CRC_BYTES || !header_sound(bytes, size) ||
        magnav_crc32(bytes, size - CRC_BYTES) != read_u32(bytes + size - CRC_BYTES)) {
        return MAGNAV_E_MODEL;
    }
    (void)memset(&found, 0, sizeof found);
    found.bytes = bytes;
    found.degree = (int32_t)read_u16(bytes + 6);
    found.order = (int32_t)read_u16(bytes + 8);
    found.pieces = (int32_t)read_u16(bytes + 10);
    found.valid_from_yr = (magnav_real)read_signed(bytes + 16, 4U) / (magnav_real)MAGNAV_IMAGE_YEAR;
    found.valid_until_yr = (magnav_real)read_signed(bytes + 20, 4U) / (magnav_real)MAGNAV_IMAGE_YEAR;
    for (int32_t i = 0; i < MAGNAV_IMAGE_NAME; i++) {
        found.name[i] = (char)bytes[24 + i];
    }
    if (found.degree > MAGNAV_MAX_DEGREE || found.order > MAGNAV_MAX_TIME_ORDER) {
        return MAGNAV_E_MEMORY;
    }
    for (int32_t i = 0; i < found.pieces; i++) {
        if (!(image_break(&found, i + 1) > image_break(&found, i))) {
            return MAGNAV_E_MODEL;
        }
    }
    *image = found;
    return MAGNAV_OK;
}

magnav_status magnav_image_snapshot(const magnav_image *image, magnav_real year, int32_t extrapolate,
                                    magnav_real *memory, size_t memory_reals, magnav_snapshot *snapshot)
{
    timeline line;

    if (image == NULL || image->bytes == NULL || memory == NULL || snapshot == NULL) {
        return MAGNAV_E_NULL;
    }
    line.source = image;
    line.break_yr = image_break;
    line.value = image_value;
    line.valid_from_yr = image->valid_from_yr;
    line.valid_until_yr = image->valid_until_yr;
    line.degree = image->degree;
    line.order = image->order;
    line.pieces = image->pieces;
    return magnav_timeline_snapshot(&line, year, extrapolate, memory, memory_reals, snapshot);
}
