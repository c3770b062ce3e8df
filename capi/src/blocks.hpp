// What the entries of every block share. No exception is thrown here and nothing allocates.
#pragma once

#include <cstdint>
#include <cstring>
#include <type_traits>

#include "handles.hpp"
#include "structs.hpp"

namespace tauwright::shell {

/// A block's memory may be copied byte for byte.
template <class Block>
inline constexpr bool plain_block = std::is_trivially_copyable_v<Block> && std::is_trivially_destructible_v<Block>;

/// Runs `body` on a live block, for whose results there is room.
template <class Block, class Body, class... Results>
std::int32_t on_block(Block* block, tauw_error* error, const Body& body, const Results*... results) noexcept {
    using enum error_code;
    if (!usable(error)) return TAUW_ERROR_WRONG_STRUCT_SIZE;
    if (block == nullptr) return report(error, null_pointer, Block::null_text);
    if (magic_at(block) != std::remove_const_t<Block>::kind) return report(error, wrong_handle, Block::wrong_text);
    if ((!results || ...)) return report(error, null_pointer, "the result's pointer is NULL; give a place for it");
    const error_code code = body(block->value);
    return report(error, code, code == ok ? "" : meaning_of(code));
}

/// Memory that can hold a block, and struct sizes that are known.
template <class Block, class Coefficients>
std::int32_t check_memory(const void* memory, std::size_t size, const Coefficients* coefficients, Block** block,
                          tauw_error* error) noexcept {
    using enum error_code;
    if (!usable(error)) return TAUW_ERROR_WRONG_STRUCT_SIZE;
    if (block == nullptr) return report(error, null_pointer, Block::null_text);
    *block = nullptr;
    if (memory == nullptr || coefficients == nullptr)
        return report(error, null_pointer,
                      memory == nullptr ? "memory is NULL; give memory for the block"
                                        : "coefficients is NULL; give coefficients");
    if (!is_known_size<Coefficients>(coefficients->struct_size))
        return report(error, wrong_struct_size,
                      "coefficients.struct_size is unknown; fill the struct with its _defaults function");
    if (reinterpret_cast<std::uintptr_t>(memory) % alignof(Block) != 0)
        return report(error, out_of_domain, "memory is not aligned; align it as the block's _align says");
    if (size < sizeof(Block))
        return report(error, buffer_too_small, "size is too small; give as much as the block's _size says");
    return TAUW_OK;
}

/// The caller's coefficients, as far as the caller knows them, over the defaults.
template <class C>
C known_part(const C& coefficients) noexcept {
    C copy = fresh<C>();
    std::memcpy(&copy, &coefficients, coefficients.struct_size);
    return copy;
}

}  // namespace tauwright::shell
